"""Markdown without surprises: every text is escaped, so that nothing a user wrote becomes markup."""

from __future__ import annotations

import re

_ALWAYS = re.compile(r"([\\`*\[\]<>|~$&])")
_UNDERSCORE = re.compile(r"(?<![A-Za-z0-9])_|_(?![A-Za-z0-9])")
_LINE_START = re.compile(r"^(\d+)([.)])(?=\s|$)|^([#+\-=])")


def escape_markdown(text: str) -> str:
    """Escape a one-line text for Markdown, in a paragraph, a list or the cell of a table."""
    escaped = _UNDERSCORE.sub(r"\\_", _ALWAYS.sub(r"\\\1", text))
    return _LINE_START.sub(lambda match: f"{match[1]}\\{match[2]}" if match[1] else f"\\{match[3]}", escaped)
