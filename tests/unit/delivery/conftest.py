"""A real SMTP server on the loopback address, at a port that the system chooses."""

import contextlib
import shutil
import socket
import ssl
import subprocess
import threading

import pytest
from aiosmtpd.controller import Controller
from aiosmtpd.smtp import AuthResult, LoginPassword

HOST = "127.0.0.1"
USERNAME, PASSWORD = "desk", "s3cret-Pass"  # known to this server only


class LoopbackController(Controller):
    """Binds first and tells the port afterwards."""

    def _create_server(self):
        listener = socket.socket(socket.AF_INET, socket.SOCK_STREAM)
        listener.bind((HOST, 0))
        self.port = listener.getsockname()[1]
        return self.loop.create_server(self._factory_invoker, sock=listener, ssl=self.ssl_context)


class Inbox:
    """Keeps what it is given and answers as it is told.

    `replies` maps a recipient, "MAIL" or "DATA" to the answer that it gets instead of 250.
    """

    def __init__(self):
        self.replies, self.log, self.envelopes = {}, [], []
        self.secure, self.users = [], []

    async def handle_MAIL(self, server, session, envelope, address, options):  # noqa: N802, ARG002 - aiosmtpd's hook
        self.log.append("MAIL")
        if "MAIL" in self.replies:
            return self.replies["MAIL"]
        envelope.mail_from = address
        envelope.mail_options.extend(options)
        return "250 OK"

    async def handle_RCPT(self, server, session, envelope, address, options):  # noqa: N802, ARG002 - aiosmtpd's hook
        self.log.append(f"RCPT {address}")
        if address in self.replies:
            return self.replies[address]
        envelope.rcpt_tos.append(address)
        return "250 OK"

    async def handle_DATA(self, server, session, envelope):  # noqa: N802, ARG002 - aiosmtpd's hook
        self.log.append("DATA")
        if "DATA" in self.replies:
            return self.replies["DATA"]
        self.envelopes.append(envelope)
        self.secure.append(session.ssl is not None)
        self.users.append(session.auth_data.login.decode() if session.authenticated else None)
        return "250 OK"


def _authenticate(server, session, envelope, mechanism, auth_data):  # noqa: ARG001 - aiosmtpd's hook
    good = LoginPassword(USERNAME.encode(), PASSWORD.encode())
    return AuthResult(success=auth_data == good, handled=False, auth_data=auth_data)


@pytest.fixture
def inbox():
    return Inbox()


@pytest.fixture
def serve(inbox):
    """Starts the server with options of aiosmtpd and gives its port."""
    with contextlib.ExitStack() as running:

        def start(**options):
            controller = LoopbackController(inbox, hostname=HOST, **options)
            controller.start()
            running.callback(controller.stop)
            return controller.port

        yield start


@pytest.fixture
def serve_with_login(serve):
    """Starts a server that knows one user, and tells in `inbox.users` who sent a mail."""

    def start(**options):
        return serve(authenticator=_authenticate, **options)

    return start


@pytest.fixture
def certificate(tmp_path):
    """A certificate for 127.0.0.1 that only itself vouches for, and its server context."""
    if shutil.which("openssl") is None:
        pytest.skip("the openssl command makes the certificate, and it is not installed")
    key, cert = tmp_path / "key.pem", tmp_path / "cert.pem"
    subprocess.run(
        [
            *("openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256"),
            *("-nodes", "-days", "2", "-subj", "/CN=127.0.0.1"),
            *("-addext", "subjectAltName=IP:127.0.0.1", "-keyout", str(key), "-out", str(cert)),
        ],
        check=True,
        capture_output=True,
    )
    context = ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)
    context.load_cert_chain(cert, key)
    return cert, context


@pytest.fixture
def scripted():
    """Starts a server that speaks fixed lines: what it says first, and after each command.

    A value of None says nothing more and leaves the connection open; "CLOSE" closes it.
    """
    with contextlib.ExitStack() as running:

        def start(greeting, **answers):
            listener = socket.create_server((HOST, 0))
            over = threading.Event()
            worker = threading.Thread(target=_speak, args=(listener, greeting, answers, over))
            worker.start()
            running.callback(worker.join)
            running.callback(listener.close)
            running.callback(over.set)
            return listener.getsockname()[1]

        yield start


def _speak(listener, greeting, answers, over):
    peer, _ = listener.accept()
    with peer, peer.makefile("rb") as lines:
        answer = greeting
        while answer is not None and answer != "CLOSE":
            peer.sendall(answer.encode() + b"\r\n")
            command = lines.readline().split(b" ")[0].strip().upper().decode()
            if not command:
                return
            answer = answers.get(command, "250 OK")
            if command == "DATA" and answer == "354 go on":
                peer.sendall(b"354 go on\r\n")
                while lines.readline() not in (b".\r\n", b""):
                    pass
                answer = answers["TEXT"]
        if answer is None:
            over.wait()
