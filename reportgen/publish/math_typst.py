"""MathML to Typst's math: every token is written so that Typst can read it one way only.

Typst guesses in places: it joins letters to names, pairs brackets, turns ``/`` into a
fraction, reads ``a: b`` in a call as a named argument. MathML has already decided all of
this, so letters stand alone or in quotes, and every other sign is escaped.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable
from xml.etree.ElementTree import Element

from reportgen.errors import PublishError
from reportgen.publish.characters import for_paper, printable

_ACCENTS = {
    "\u0307": "dot", "\u02d9": "dot", "\u0308": "dot.double", "\u00a8": "dot.double",
    "\u20db": "dot.triple", "\u20dc": "dot.quad", "\u0302": "hat", "^": "hat", "\u02c6": "hat",
    "\u0303": "tilde", "~": "tilde", "\u02dc": "tilde", "\u0304": "macron", "\u203e": "macron",
    "\u2192": "arrow", "\u20d7": "arrow", "\u2190": "arrow.l", "\u0306": "breve",
    "\u02d8": "breve", "\u030c": "caron", "\u02c7": "caron", "\u0300": "grave", "`": "grave",
    "\u0301": "acute", "\u00b4": "acute", "\u030a": "circle", "\u02da": "circle",
}  # fmt: skip
_LINES = {
    ("mover", "\u00af"): "overline",
    ("munder", "\u005f"): "underline",
    ("munder", "\u0332"): "underline",
    ("munder", "\u203e"): "underline",
    ("mover", "\u23de"): "overbrace",
    ("munder", "\u23df"): "underbrace",
    ("mover", "\u23b4"): "overbracket",
    ("munder", "\u23b5"): "underbracket",
}
_MOVING = set("∑∏∐⋂⋃⋁⋀⨁⨂⨀⨄⨆")  # limits stand where Typst puts them: below, or beside in a line
_INVISIBLE = {"\u2061", "\u2062", "\u2063", "\u2064"}
_BARS = ("|", "\u2016")
_SIDES = {"prefix": "opening", "postfix": "closing"}
_NUMBER = re.compile(r"\d+(\.\d+)?")
_WIDTH = re.compile(r"-?\d*\.?\d+em")


def equation(tree: Element) -> str:
    """Return a formula as the body of a Typst equation, without its dollar signs.

    Raises
    ------
    PublishError
        If the formula holds something that this cannot set.
    """
    if tree.tag == "mtable":
        return _lines(tree)
    return _set(tree)


def _set(element: Element) -> str:
    match element.tag:
        case "mrow" | "mstyle" if element.get("displaystyle") is None:
            return _row(list(element))
        case "mstyle":
            return _call("display" if element.get("displaystyle") == "true" else "inline", element)
        case "mi":
            return _identifier(element)
        case "mn":
            return _number(_text(element))
        case "mo":
            return _operator(element)
        case "mtext":
            return _quoted(_text(element).strip(" "))
        case "mspace":
            return _space(element)
        case "mfrac":
            return _fraction(element)
        case "msqrt":
            return f"sqrt({_row(list(element))})"
        case "mroot":
            body, index = element
            return f"root({_set(index)},{_set(body)})"
        case "msub" | "msup" | "msubsup":
            return _scripts(element)
        case "munder" | "mover" | "munderover":
            return _limits(element)
        case "mtable":
            return _matrix(element)
        case "mphantom":
            return f"#hide(${_row(list(element))}$)"
        case _:
            raise PublishError(f"a formula holds <{element.tag}>, which a report does not set")


def _text(element: Element) -> str:
    return "".join(element.itertext())


def _join(parts: Iterable[str]) -> str:
    """Return parts side by side, a space only where two names or numbers would run together."""
    out = ""
    for part in parts:
        if out and part and (out[-1].isalnum() or out[-1] == "_") and part[0].isalnum():
            out += " "
        out += part
    return out


def _call(function: str, element: Element) -> str:
    return f"{function}({_row(list(element))})"


# --- rows ----------------------------------------------------------------------------------


def _row(children: list[Element]) -> str:
    children = [c for c in children if not (c.tag == "mo" and _text(c) in _INVISIBLE)]
    opening = bool(children) and _stretches(children[0], "prefix")
    closing = len(children) > 1 and _stretches(children[-1], "postfix")
    body = _join(_words(children))
    if not (opening or closing) or (opening and len(children) == 1):
        return body
    # lr scales whatever bracket stands first and last: an empty box keeps it off the body
    shield = "#box()"
    return f"lr({'' if opening else shield}{body}{'' if closing else shield})"


def _stretches(element: Element, form: str) -> bool:
    return (
        element.tag == "mo"
        and element.get("stretchy") == "true"
        and element.get("form") == form
        and not element.get("minsize")
    )


def _words(children: list[Element]) -> Iterable[str]:
    """Yield the pieces of a row; upright letters that follow each other are one word."""
    word = ""
    for child in children:
        text = _text(child)
        if child.tag == "mi" and child.get("mathvariant") == "normal" and len(text) == 1:
            word += text
            continue
        if word:
            yield _upright(word)
            word = ""
        yield _set(child)
    if word:
        yield _upright(word)


# --- tokens --------------------------------------------------------------------------------


def _upright(word: str) -> str:
    return f"upright({_sign(word)})" if len(word) == 1 and word.isalpha() else _quoted(word)


def _identifier(element: Element) -> str:
    text = _text(element)
    normal = element.get("mathvariant") == "normal"
    if len(text) > 1:
        # a name such as sin or lim; a longer one without that style is a word of its own
        return f"op({_quoted(text)})" if normal else f"italic({_quoted(text)})"
    if not text:
        return ""
    if not unicodedata.category(text).startswith("L"):
        return f'class("normal",{_sign(text)})'
    return _upright(text) if normal else _sign(text)


def _number(text: str) -> str:
    return text if _NUMBER.fullmatch(text) else _quoted(text)


def _operator(element: Element) -> str:
    text = _text(element)
    if text in _INVISIBLE or not text:
        return ""
    if size := element.get("minsize"):
        percent = re.sub(r"[^0-9.%]", "", size)
        return f"lr(size:#{percent},{_sign(text)})"
    if element.get("stretchy") == "true" and element.get("form") == "infix":
        return f"mid({_sign(text)})"
    if text in _BARS and (side := _SIDES.get(element.get("form", ""))):
        return f'class("{side}",{_sign(text)})'
    return _quoted(text) if len(text) > 1 else _sign(text)


def _sign(character: str) -> str:
    """Return one character that stands for itself."""
    if not printable(character):
        return _quoted(character)
    return character if character.isalnum() or ord(character) > 127 else f"\\{character}"


def _quoted(text: str) -> str:
    shown = "".join(piece for _, piece in for_paper(text))
    return '"' + shown.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _space(element: Element) -> str:
    width = element.get("width", "0em")
    if not _WIDTH.fullmatch(width):
        raise PublishError(f"a formula holds a space of width {width!r}; em is what would do")
    return f"#h({width});"


# --- structures ----------------------------------------------------------------------------


def _fraction(element: Element) -> str:
    above, below = (_set(child) for child in element)
    if element.get("linethickness") == "0":
        return f"mat(delim:#none,{above};{below})"
    return f"frac({above},{below})"


def _scripts(element: Element) -> str:
    base, *scripts = element
    names = {"msub": "b", "msup": "t", "msubsup": "bt"}[str(element.tag)]
    inner = _set(base)
    if _text(base) in _MOVING:
        inner = f"scripts({inner})"
    attached = ",".join(f"{n}:{_set(s)}" for n, s in zip(names, scripts, strict=True))
    return f"attach({inner or chr(34) * 2},{attached})"


def _limits(element: Element) -> str:
    tag = str(element.tag)
    base, *scripts = element
    if len(scripts) == 1:
        mark = _text(scripts[0])
        if scripts[0].tag == "mo" and (function := _LINES.get((tag, mark))):
            return f"{function}({_set(base)})"
        if tag == "mover" and scripts[0].get("accent") == "true" and mark in _ACCENTS:
            return f"accent({_set(base)},{_ACCENTS[mark]})"
        if scripts[0].get("accent") == "true":
            raise PublishError(f"a formula holds the accent {mark!r}, which a report does not set")
    inner = _set(base)
    if base.tag == "mi" and len(_text(base)) > 1:
        inner = f"op({_quoted(_text(base))},limits:#true)"
    elif _text(base) not in _MOVING:
        inner = f"limits({inner})"
    names = {"munder": "b", "mover": "t", "munderover": "bt"}[tag]
    attached = ",".join(f"{n}:{_set(s)}" for n, s in zip(names, scripts, strict=True))
    return f"attach({inner},{attached})"


def _cells(table: Element) -> list[list[Element]]:
    return [list(row) for row in table]


def _matrix(table: Element) -> str:
    """Return a table within a formula; each cell carries its own alignment."""
    rows = _cells(table)
    sides = [cell.get("columnalign", "center") for row in rows for cell in row]
    one = sides[0] if len(set(sides)) == 1 else None
    pairs = "padding-right: 0" in (rows[0][0].get("style") or "")
    options = ["delim:#none"]
    if one and one != "center":
        options.append(f"align:#{one}")
    if pairs:
        options.append("column-gap:#0.2em")
    body = ";".join(
        ",".join(_aligned(cell) if one is None else _cell(cell) for cell in row) for row in rows
    )
    return f"mat({','.join(options)},{body})"


def _cell(cell: Element) -> str:
    return _row(list(cell)) or '""'


def _aligned(cell: Element) -> str:
    body = _cell(cell)
    return {"right": f"{body}&", "left": f"&{body}"}.get(cell.get("columnalign", ""), body)


def _lines(table: Element) -> str:
    """Return aligned equations, one below the other."""
    rows = _cells(table)
    if all(c.get("columnalign", "center") == "center" for row in rows for c in row):
        return _matrix(table)
    return " \\\n".join("&".join(_row(list(cell)) for cell in row) for row in rows)
