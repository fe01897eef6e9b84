"""What is refused of XML before any parser sees it: document types, entities, odd encodings."""

import re

from app.intake.problems import refusal

_ENCODING = re.compile(rb"<\?xml[^>]{0,200}?encoding\s*=\s*[\"']([^\"']{1,40})[\"']")
_SAFE = frozenset(
    b"utf-8 utf8 utf-16 us-ascii ascii iso-8859-1 iso-8859-15 windows-1250 windows-1252".split()
)
_DECLARED = re.compile(rb"<!(?:DOCTYPE|ENTITY)", re.IGNORECASE)


def refuse_entities(file: str, content: bytes) -> None:
    """Raise where XML declares a document type or an entity, which may grow or fetch when read.

    The encodings let through write ``<!`` as ASCII does, but for zero bytes between; so no
    declaration hides from a search of the bytes.

    Raises
    ------
    IntakeError
        There is such a declaration, or an encoding in which one could hide.
    """
    plain = content.replace(b"\x00", b"") if b"\x00" in content else content
    encoding = _ENCODING.search(plain[:1024])
    if encoding and encoding[1].lower() not in _SAFE:
        raise refusal(file, "XML must be written in UTF-8, but this declares another encoding")
    if b"<!" in plain and _DECLARED.search(plain):
        raise refusal(file, "XML must not declare a document type or entities, but this does")
