"""A formula in words, for alternative texts: what a colleague would read out."""

from __future__ import annotations

import unicodedata
from xml.etree.ElementTree import Element

_SIGNS = {
    "=": "equals", "+": "plus", "−": "minus", "-": "minus", "×": "times", "⋅": "times",
    "·": "times", "/": "over", "±": "plus or minus", "≤": "at most", "≥": "at least",
    "<": "less than", ">": "greater than", "≈": "about", "≠": "not equal to", "∑": "sum",
    "∫": "integral", "∏": "product", "→": "to", "∞": "infinity", "∂": "partial", "∈": "in",
    "′": "prime", "″": "double prime", "%": "percent", "|": "bar", "‖": "norm bar",
    "°": "degrees", "(": "(", ")": ")", ",": ",",
    "\u2061": "", "\u2062": "", "\u2063": "", "\u2064": "",
}  # fmt: skip
_ACCENTS = {
    "\u0307": "dot", "\u0308": "double dot", "\u0302": "hat", "\u0303": "tilde",
    "\u203e": "bar", "\u00af": "bar", "\u2192": "vector", "\u0304": "bar",
}  # fmt: skip
_ENDINGS = {"2": "squared", "3": "cubed"}


def words(tree: Element) -> str:
    """Return a formula in words."""
    return " ".join(_say(tree).split()).replace("( ", "(").replace(" )", ")").replace(" ,", ",")


def _say(element: Element) -> str:
    children = list(element)
    match element.tag:
        case "mi" | "mn" | "mo" | "mtext":
            return _token("".join(element.itertext()))
        case "mspace" | "mphantom":
            return " "
        case "mfrac":
            return f"{_group(children[0])} over {_group(children[1])}"
        case "msqrt":
            return f"square root of {_all(children)} end root"
        case "mroot":
            return f"root {_say(children[1])} of {_say(children[0])} end root"
        case "msub" | "munder" | "mover" | "msup" | "msubsup" | "munderover":
            return _scripted(element)
        case "mtable":
            return "; ".join(", ".join(_all(list(cell)) for cell in row) for row in element)
        case _:
            return _row(children)


def _row(children: list[Element]) -> str:
    """Join upright letters to the words they spell."""
    out, last = "", False
    for child in children:
        text = "".join(child.itertext())
        letter = child.tag == "mi" and child.get("mathvariant") == "normal" and text.isalpha()
        out += ("" if letter and last else " ") + (
            text if letter and len(text) == 1 and text.isascii() else _say(child)
        )
        last = letter
    return out


def _all(children: list[Element]) -> str:
    return _row(children)


def _group(element: Element) -> str:
    said = _say(element).strip()
    return f"({said})" if len(element) > 1 and " " in said else said


def _scripted(element: Element) -> str:
    base, *scripts = element
    said = [_say(script).strip() for script in scripts]
    subject = _say(base)
    match element.tag:
        case "msub":
            return f"{subject} sub {said[0]}"
        case "msup":
            if said[0] in _ENDINGS:
                return f"{_group(base)} {_ENDINGS[said[0]]}"
            return (
                f"{_group(base)} {said[0]}"
                if "prime" in said[0]
                else (f"{_group(base)} to the power {said[0]}")
            )
        case "msubsup":
            return f"{subject} sub {said[0]} to the power {said[1]}"
        case "mover" if mark := _ACCENTS.get("".join(scripts[0].itertext())):
            return f"{subject} {mark}"
        case "mover":
            return f"{subject} with {said[0]} above"
        case "munder" if base.tag == "mo":
            return f"{subject} over {said[0]}"
        case "munder":
            return f"{subject} with {said[0]} below"
        case _:
            return f"{subject} from {said[0]} to {said[1]}"


def _token(text: str) -> str:
    if text in _SIGNS:
        return f" {_SIGNS[text]} "
    if len(text) == 1 and not text.isascii() and text.isalpha():
        name = unicodedata.name(unicodedata.normalize("NFKC", text)[0], text)
        for start in ("GREEK SMALL LETTER ", "GREEK CAPITAL LETTER "):
            if name.startswith(start):
                greek = name.removeprefix(start).lower()
                return f" {greek if 'SMALL' in start else 'capital ' + greek} "
        return unicodedata.normalize("NFKC", text)
    return text
