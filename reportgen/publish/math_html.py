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
    inner = escape(plain(element.text or ""), quote=False) if not len(element) else ""
    return f"<{tag}{shown}>{inner}{''.join(_element(child) for child in element)}</{tag}>"
