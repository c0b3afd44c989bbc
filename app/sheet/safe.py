"""Text of people made fit for a cell: nothing in it can act, everything in it can be seen."""

import re

LONGEST = 32_000  # a cell takes 32,767
PICTURES = 0x2400  # the visible picture of a control character
_UNSEEN = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff]")


def shown(text: str) -> str:
    """Control characters as their pictures (tab and line breaks stay), broken ones as �, not too long."""
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    text = _UNSEEN.sub(_picture, text)
    return text if len(text) <= LONGEST else text[: LONGEST - 1] + "…"


def _picture(found: re.Match[str]) -> str:
    code = ord(found[0])
    if code < 0x20:
        return chr(PICTURES + code)
    return "\u2421" if code == 0x7F else "\ufffd"
