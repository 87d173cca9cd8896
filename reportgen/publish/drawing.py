"""Drawings made fit for a page: nothing that runs or loads, ids of their own."""

from __future__ import annotations

import re
from html import escape
from xml.etree import ElementTree

from reportgen.errors import PublishError

_DRAWN = {
    "svg", "g", "defs", "path", "rect", "circle", "ellipse", "line", "polyline", "polygon",
    "use", "symbol", "clipPath", "mask", "text", "tspan", "title", "desc", "linearGradient",
    "radialGradient", "stop", "pattern", "marker", "image",
}  # fmt: skip
_LEFT_OUT = {"metadata", "style"}  # a style element would reach the whole page
_URL = re.compile(r"url\(\s*['\"]?#([^)'\"]+)['\"]?\s*\)")
_DECLARED = re.compile(rb"<!(?:DOCTYPE|ENTITY)", re.IGNORECASE)


def inline(svg: str, prefix: str, alt: str) -> str:
    """Return a drawing for a place inside an HTML page.

    Ids get the prefix, so that no two drawings of a page share one; style attributes
    become plain ones, which a strict Content-Security-Policy lets pass.

    Raises
    ------
    PublishError
        If the drawing holds what runs, loads or is not a drawing.
    """
    root = _parsed(svg.encode())
    if root.tag != "svg":
        raise PublishError(f"{prefix}: a figure's drawing is <{root.tag}>; svg is what would do")
    root.attrib = {
        "class": "drawing",
        "role": "img",
        "aria-label": alt,
        "viewBox": root.get("viewBox") or _box(root),
        "stroke-linejoin": "round",
        "stroke-linecap": "butt",
    }
    return _written(root, prefix)


def _box(root: ElementTree.Element) -> str:
    sides = [re.sub(r"[^0-9.]", "", root.get(name, "")) or "0" for name in ("width", "height")]
    return f"0 0 {sides[0]} {sides[1]}"


def _parsed(svg: bytes) -> ElementTree.Element:
    if _DECLARED.search(svg):
        raise PublishError("a drawing declares a document type; leave that out")
    try:
        root = ElementTree.fromstring(svg)
    except ElementTree.ParseError as error:
        raise PublishError(f"a drawing is not well-formed XML: {error}") from error
    for element in root.iter():
        element.tag = str(element.tag).rpartition("}")[2]
        element.attrib = {_local(name): value for name, value in element.attrib.items()}
    return root


def _local(name: str) -> str:
    return name.rpartition("}")[2]


def _written(element: ElementTree.Element, prefix: str) -> str:
    tag = str(element.tag)
    if tag in _LEFT_OUT:
        return ""
    if tag not in _DRAWN:
        raise PublishError(f"a drawing holds <{tag}>, which a report does not print")
    attributes = "".join(
        f' {name}="{escape(value)}"' for name, value in _attributes(element, prefix).items()
    )
    words = tag in ("text", "tspan", "title", "desc")
    inner = escape(element.text or "", quote=False) if words else ""
    for child in element:
        inner += _written(child, prefix)
        inner += escape(child.tail or "", quote=False) if words else ""
    return f"<{tag}{attributes}>{inner}</{tag}>"


def _attributes(element: ElementTree.Element, prefix: str) -> dict[str, str]:
    kept: dict[str, str] = {}
    for name, value in element.attrib.items():
        if name == "style":
            for declaration in value.split(";"):
                key, colon, content = declaration.partition(":")
                if colon:
                    kept[key.strip()] = content.strip()
        else:
            kept[name] = value
    for name, value in kept.items():
        if fault := _fault(str(element.tag), name, value):
            raise PublishError(f"a drawing holds {fault}, which a report does not print")
        if name == "id":
            kept[name] = f"{prefix}-{value}"
        elif name == "href" and value.startswith("#"):
            kept[name] = f"#{prefix}-{value[1:]}"
        else:
            kept[name] = _URL.sub(rf"url(#{prefix}-\1)", value)
    return kept


def _fault(tag: str, name: str, value: str) -> str:
    """Name what would run or load, if anything."""
    if not re.fullmatch(r"[A-Za-z][\w:.-]*", name):
        return f"the attribute {name!r}"
    if name.lower().startswith("on"):
        return f"a handler ({name})"
    if name == "href":
        own = value.startswith("#") or (
            tag == "image" and value.startswith("data:image/png;base64,")
        )
        return "" if own else f"a link to {value[:40]!r}"
    if "url(" in _URL.sub("", value) or "javascript:" in value.lower():
        return f"a link to {value[:40]!r}"
    return ""


def check_logo(content: bytes) -> str:
    """Return what is wrong with a logo, in words; empty if nothing is."""
    if content.startswith(b"\x89PNG\r\n\x1a\n"):
        return ""
    try:
        root = _parsed(content)
        if root.tag != "svg":
            return f"is <{root.tag}>, not a drawing"
        _written(root, "logo")
    except PublishError as error:
        return str(error)
    return ""
