"""A recipe of the guide as rich text of the window's own sizes."""

from __future__ import annotations

import re
from html import escape

_CODE = re.compile(r"`([^`]*)`")
_LINK = re.compile(r"\[([^\]]+)\]\([^)]*\)")
_STRONG = re.compile(r"\*\*([^*]+)\*\*")
_NUMBERED = re.compile(r"\d+\. ")


def rich_recipe(markdown: str) -> str:
    """Turn the few marks that recipes use into rich text: heads, lists, paragraphs.

    Parameters
    ----------
    markdown : str
        The recipe; its title is left out.

    Returns
    -------
    str
        Every other character is shown as it stands.
    """
    found: list[str] = []
    open_list = ""
    for line in markdown.splitlines():
        text = line.strip()
        kind = "ul" if text.startswith("- ") else "ol" if _NUMBERED.match(text) else ""
        if open_list and kind != open_list:
            found.append(f"</{open_list}>")
            open_list = ""
        if not text or text.startswith("# "):
            continue
        if text.startswith("## "):
            found.append(f"<p style='font-weight:600; margin:8px 0 2px 0'>{_inline(text[3:])}</p>")
        elif kind:
            if not open_list:
                found.append(f"<{kind} style='margin:0 0 0 -22px'>")
                open_list = kind
            item = text[2:] if kind == "ul" else _NUMBERED.sub("", text, count=1)
            found.append(f"<li style='margin-bottom:3px'>{_inline(item)}</li>")
        else:
            found.append(f"<p style='margin:0 0 4px 0'>{_inline(text)}</p>")
    if open_list:
        found.append(f"</{open_list}>")
    return "".join(found)


def _inline(text: str) -> str:
    plain = _LINK.sub(r"\1", escape(text, quote=False))
    return _CODE.sub(r"<i>\1</i>", _STRONG.sub(r"<span style='font-weight:600'>\1</span>", plain))
