"""MathML for the HTML report: only what the standard's core shows, with words beside it."""

from __future__ import annotations

from html import escape
from xml.etree.ElementTree import Element

from reportgen.errors import PublishError
from reportgen.publish.characters import plain

_KEPT: dict[str, tuple[str, ...]] = {
    "mrow": (), "mi": ("mathvariant",), "mn": (), "mtext": (), "mfrac": ("linethickness",),
    "mo": ("stretchy", "form", "minsize", "maxsize", "accent"), "mspace": ("width",),
    "msqrt": (), "mroot": (), "msub": (), "msup": (), "msubsup": (), "munder": (), "mover": (),
    "munderover": (), "mtable": (), "mtr": (), "mtd": (), "mstyle": ("displaystyle",),
    "mphantom": (),
}  # fmt: skip


_STANDING = {
    "\u0307": "\u02d9", "\u0308": "\u00a8", "\u0302": "\u02c6", "\u0303": "\u02dc",
    "\u0304": "\u00af", "\u0306": "\u02d8", "\u030c": "\u02c7", "\u0300": "`",
    "\u0301": "\u00b4", "\u030a": "\u02da",
}  # fmt: skip
"""Accents that stand by themselves; browsers set those that combine beside their letter."""

_INVISIBLE = ("\u2061", "\u2062", "\u2063", "\u2064")
"""Function application, times, separator, plus: for who reads aloud; they have no shape."""


def math(tree: Element, words: str, display: bool) -> str:
    """Return a formula as a ``math`` element; ``words`` tells it to who cannot see it."""
    shape = ' display="block"' if display else ""
    return f'<math{shape} alttext="{escape(plain(words))}">{_element(tree)}</math>'


def _element(element: Element) -> str:
    tag = str(element.tag)
    if tag not in _KEPT:
        raise PublishError(f"a formula holds <{tag}>, which a report does not set")
    attributes = {name: element.get(name) for name in _KEPT[tag]}
    if attributes.get("mathvariant") != "normal":  # the others are in the characters themselves
        attributes.pop("mathvariant", None)
    shown = "".join(f' {k}="{escape(v)}"' for k, v in attributes.items() if v is not None)
    if tag == "mtd":
        classes = [element.get("columnalign", "center")]
        if "padding" in (element.get("style") or ""):
            classes.append("pair")
        shown += f' class="{" ".join(classes)}"'
    own = element.text or "" if not len(element) else ""
    if tag == "mo" and own in _STANDING:
        own = _STANDING[own]
    inner = own if own in _INVISIBLE else escape(plain(own), quote=False)
    return f"<{tag}{shown}>{inner}{''.join(_element(child) for child in element)}</{tag}>"
