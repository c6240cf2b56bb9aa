"""Files that hold one item each: plain text, HTML, and mail."""

from __future__ import annotations

import hashlib

from vanner.records import RawItem
from vanner.sources.decoding import decode
from vanner.sources.folder.mail import mail_item

DOCUMENT_BYTES = 50 * 2**20
_TITLE_CHARACTERS = 200


def document_item(data: bytes, extension: str) -> RawItem | str:
    """The item that a file's bytes hold, or a clause that says why there is none.

    Args:
        data: All of the file.
        extension: `.txt`, `.html`, `.htm` or `.eml`.
    """
    if len(data) > DOCUMENT_BYTES:
        return f"it is larger than {DOCUMENT_BYTES // 2**20} MB"
    if not data.strip():
        return "it is empty"
    guid = "sha256:" + hashlib.sha256(data).hexdigest()
    if extension == ".txt":
        return _text_item(data, guid)
    if extension == ".eml":
        return mail_item(data, guid)
    return RawItem(guid=guid, content_html=data)


def _text_item(data: bytes, guid: str) -> RawItem | str:
    """A first line of at most 200 characters is the title.

    The file's name is not used: the same text under another name must be the same item.
    """
    text = decode(data).strip("\ufeff\0 \t\r\n\f\v")
    if not text:
        return "it holds no text"
    first, _, rest = text.replace("\r\n", "\n").replace("\r", "\n").partition("\n")
    if len(first.strip()) <= _TITLE_CHARACTERS:
        return RawItem(guid=guid, title=first.strip(), content_text=rest.strip())
    return RawItem(guid=guid, content_text=text)
