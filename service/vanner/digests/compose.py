"""Composing a digest: subject, plain text and HTML, from its content alone."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

from vanner.alerts.lines import cut
from vanner.alerts.rendering import environment
from vanner.alerts.wording import CARE, counted
from vanner.digests.view import digest_view, is_empty
from vanner.records import DigestContent

_SUBJECT_CELLS = 150


@dataclass(frozen=True, slots=True)
class ComposedDigest:
    """A digest as it is stored, mailed and filed."""

    subject: str
    body_text: str
    body_html: str


def compose_digest(content: DigestContent, zone: ZoneInfo) -> ComposedDigest:
    """Word a digest. The same content always gives the same texts.

    A digest without anything to say is composed all the same and says that the desk was
    quiet: its reader can tell that from a digest that never came.

    Args:
        content: What the digest says.
        zone: The desk's time zone, in which its times are written.
    """
    view = digest_view(content, zone)
    subject = cut(
        f"[{content.desk}] Digest {view.slot}: {_in_short(content)}",
        _SUBJECT_CELLS,
    )
    filled = {"care": CARE, "digest": view, "subject": subject}
    templates = environment("vanner.digests")
    return ComposedDigest(
        subject=subject,
        body_text=templates.get_template("digest.txt.j2").render(filled),
        body_html=templates.get_template("digest.html.j2").render(filled),
    )


def _in_short(content: DigestContent) -> str:
    silent = sum(volume.quiet for volume in content.volumes)
    parts = ["quiet" if is_empty(content) else counted(len(content.raised), "alert")]
    if content.noted:
        parts.append(f"{len(content.noted)} noted")
    if silent:
        parts.append(f"{counted(silent, 'source')} silent")
    return ", ".join(parts)
