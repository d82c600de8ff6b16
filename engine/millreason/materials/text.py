"""Reading what people write about a material: tokens, sizes to leave aside, hardness, keys of phrases."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass

from millreason.materials.hardness import Scale

_NUMBER = r"\d+(?:[.,]\d+)?"
_RANGE = rf"(?P<low>{_NUMBER})(?:\s*(?:-|\u2013|to|\.\.)\s*(?P<high>{_NUMBER}))?"
_SCALE_WORD = r"(?P<scale>hrc|rc|hbw|hbs|hb|bhn|hv(?:10|30|5|1)?|mpa|n/mm2|n/mm²)"
_HARDNESS_AFTER = re.compile(rf"(?<![\w.]){_RANGE}\s*{_SCALE_WORD}(?!\w)", re.IGNORECASE)
_HARDNESS_BEFORE = re.compile(rf"(?<![\w-]){_SCALE_WORD}\s*[:=]?\s*{_RANGE}(?![\w.])", re.IGNORECASE)
_SCALES: dict[str, Scale] = {"h": "hb", "b": "hb", "r": "hrc", "m": "mpa", "n": "mpa"}

# Sizes, counts and masses: figures that must not be taken for a grade.
_SIZES = re.compile(
    rf"""(?<![\w.])(?:
        {_NUMBER}(?:\s*(?:mm|in)?\s*[x\u00d7*]\s*{_NUMBER}){{1,3}}\s*(?:mm|cm|m|in)?(?!\w)
      | {_NUMBER}\s*(?:mm|cm|inch(?:es)?|kg|lbs?|off|pcs|pieces|parts|deg|°|um|µm|ksi)(?!\w)
      | {_NUMBER}\s*["”″]
      | (?:\d{{1,2}}(?:\.\d+)?|\d+[ -]\d+/\d+|\d+/\d+|\.\d+)\s*(?:in|inch|")(?!\w)
      | (?:ø|dia\.?|thk|qty|thickness|t\s*=)\s*[=:]?\s*{_NUMBER}(?![\w.])
    )""",
    re.IGNORECASE | re.VERBOSE,
)
_TOKEN = re.compile(r"[^\W_]+")


@dataclass(frozen=True)
class Reading:
    """A hardness or strength that stood in the text."""

    value: float
    scale: Scale
    said: str


@dataclass(frozen=True)
class Token:
    """One run of letters and digits, folded, with its place in the text."""

    key: str
    start: int
    end: int


def fold(text: str) -> str:
    """Return text in small letters without accents."""
    plain = unicodedata.normalize("NFKD", text.casefold())
    return "".join(mark for mark in plain if not unicodedata.combining(mark))


def take_hardness(text: str) -> tuple[Reading | None, str]:
    """Return the hardness named in a text, the middle of a range, and the text without it."""
    match = _HARDNESS_AFTER.search(text) or _HARDNESS_BEFORE.search(text)
    if match is None:
        return None, text
    ends = [float(part.replace(",", ".")) for part in (match["low"], match["high"]) if part]
    word = match["scale"].casefold()
    scale: Scale = "hv" if word.startswith("hv") else "hrc" if word == "hrc" else _SCALES[word[0]]
    rest = f"{text[: match.start()]} ; {text[match.end() :]}"
    return Reading(sum(ends) / len(ends), scale, match[0].strip()), rest


def leave_sizes_out(text: str) -> str:
    """Return the text with sizes, counts and masses blanked."""
    return _SIZES.sub(" ; ", text)


def tokens_of(text: str) -> list[Token]:
    """Split a text at everything that is neither letter nor digit."""
    return [Token(fold(match[0]), match.start(), match.end()) for match in _TOKEN.finditer(text)]


def join(keys: Sequence[str]) -> str:
    """Join tokens to one key; two digits that met across a gap stay apart, so '10 18' is not 1018.

    Examples
    --------
    >>> join(["en", "gjl", "250"])
    'engjl250'
    >>> join(["1", "7225"])
    '1-7225'
    """
    key = ""
    for part in keys:
        key += ("-" if key and key[-1].isdigit() and part[0].isdigit() else "") + part
    return key


def key_of(phrase: str) -> str:
    """Return the key under which a phrase is kept and looked up."""
    return join([token.key for token in tokens_of(phrase)])


def digits_of(key: str) -> str:
    """Return the digits of a key; two names that differ in a digit are two materials."""
    return "".join(mark for mark in key if mark.isdigit())


_LOOKALIKE = str.maketrans({"o": "0", "l": "1", "i": "1", "-": None})


def skeleton(key: str) -> str:
    """Return a key with the signs that are typed for one another made equal (O and 0, l and 1)."""
    return key.translate(_LOOKALIKE)
