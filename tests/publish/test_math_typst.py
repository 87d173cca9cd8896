"""Formulas on paper say what the LaTeX says: read back by Typst's own MathML writer.

pandoc turns LaTeX into MathML; our walker turns that into Typst; Typst's HTML export (written
by others, knowing nothing of ours) turns it into MathML again. Both MathML trees must agree in
structure and in every token.
"""

from __future__ import annotations

import re
import unicodedata
import warnings
from typing import Any
from xml.etree import ElementTree
from xml.etree.ElementTree import Element

import pytest
import typst
from hypothesis import given, settings
from hypothesis import strategies as st

from reportgen.errors import PublishError
from reportgen.publish import math_typst, pandoc

FORMULAS = [
    r"\omega_n = \sqrt{\frac{k}{m}}",
    r"\frac{\frac{a}{b}}{\frac{c}{d+\frac{e}{f}}}",
    r"\left(\frac{a}{b}\right)^{\frac{1}{2}}_{k}",
    r"\frac{e\,r^{2}}{\sqrt{\left(1-r^{2}\right)^{2} + \left(2\,\zeta\,r\right)^{2}}}",
    r"{\frac{a}{b}}^{2} + \sqrt[3]{\frac{x}{y}}",
    r"\begin{pmatrix}1&2\\3&\frac{a}{b}\end{pmatrix}\begin{bmatrix}a&b\end{bmatrix}",
    r"f(x)=\begin{cases}1 & x<0\\ 2 & \text{otherwise } x\end{cases}",
    r"\dot{z}+\ddot{\theta}+\hat{a}+\vec v+\bar{x}+\tilde y",
    r"\mathbf{M}\ddot{\mathbf q}+\boldsymbol{\omega}",
    r"\sum_{i=1}^{n} \frac{x_i}{y^{i}} + \int_0^T f\,dt + \prod_{k} a_k",
    r"\lim_{x\to 0}\sin x + \operatorname{Re} z + \max_i a",
    r"f'(x)+f''_{0}",
    r"|z| + \left|\frac{z}{2}\right| + \lVert q\rVert",
    r"\begin{aligned}a&=b+c\\&=\frac{d}{e}\end{aligned}",
    r"x = 1.9\times 10^{6}\,\mathrm{N/m}\ \text{if } x > 0, y : z; w",
    r"k_\mathrm{eff} + \mathrm{d}x/\mathrm{d}t + \mathrm{mm/s^{2}}",
    r"a^{b^{c}}_{d_{e}} + {}^{2}_{1}X",
    r"\left\{\frac{a}{b}\middle|c\right\} + \left.\frac{(a)}{b}\right|_{x=0}",
    r"e^{-\zeta\omega t} - 3 \pm -4",
    r"\underbrace{a+b}_{n} + \overbrace{c}^{m}",
    r"\binom{n}{k} + \dfrac{a}{b} + \tfrac{c}{d}",
    r"x \in [0,1) \cup (2,3]; 50\,\% ; 45^\circ",
    r"\#\,\$\,\&\,\_\,\{\,\}\,a/b\,x..y\,a:b",
    r"\tan^{-1}\frac{2\zeta r}{1-r^2}",
    r"\mathrm{i}\,\Omega\,\varOmega\,\Delta\,\varphi\,\phi\,\varepsilon",
    r"ab + \mathit{Re} + \mathrm{AF} + AF",
]


def read_back(formulas: list[str]) -> list[Element]:
    """Return what Typst itself reads in our Typst, as MathML."""
    trees = pandoc.mathml(formulas)
    source = "\n\n".join(f"$ {math_typst.equation(trees[formula])} $" for formula in formulas)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the export says that it is young
        page, _ = typst.compile_with_warnings(source.encode(), format="html")
    body = page.decode()
    found = re.findall(r"<math.*?</math>", body, flags=re.DOTALL)
    return [ElementTree.fromstring(one) for one in found]


SCRIPTS = {"mfrac", "msqrt", "mroot", "msub", "msup", "msubsup", "munder", "mover", "munderover"}
BESIDE = {"munder": "msub", "mover": "msup", "munderover": "msubsup"}
SAME = {
    "\u02d9": "\u0307", "\u00a8": "\u0308", "\u02c6": "\u0302", "^": "\u0302", "\u00af": "\u0304",
    "\u203e": "\u0304", "\u0305": "\u0304", "~": "\u0303", "\u02dc": "\u0303", "\u20d7": "\u2192",
    "\u2044": "/", "\u22c5": "\u00b7", "\u2223": "|", "\u2225": "\u2016", "-": "\u2212",
    "\u2206": "\u0394", "\u2032\u2032": "\u2033", "\u03d5": "\u03c6", "\u03f5": "\u03b5",
}  # fmt: skip


def meaning(element: Element) -> list[Any]:
    """Return structure and tokens of MathML, without what only shapes them."""
    tag = str(element.tag).rpartition("}")[2]
    children = list(element)
    if tag in ("mspace", "span"):
        return []
    if tag in ("mi", "mn", "mo", "mtext"):
        text = unicodedata.normalize("NFKD", "".join(element.itertext()))
        text = "".join(SAME.get(c, c) for c in SAME.get(text, text))
        return [c for c in text if not c.isspace() and c not in "\u2061\u2062"]
    if tag in SCRIPTS and tag != "msqrt":
        if element.get("linethickness") == "0":  # a fraction without a line is a column
            return [("mtable", [[meaning(child)] for child in children])]
        if tag in BESIDE and "".join(children[0].itertext()) in math_typst._MOVING:
            tag = BESIDE[tag]  # in a line, limits of a sum stand beside it in both
        return [_merged(tag, [meaning(child) for child in children])]
    if tag == "mtable":
        # Typst's export writes an empty base of scripts as a table without rows
        rows = [[meaning(cell) for cell in row] for row in children]
        return [("mtable", rows)] if rows else []
    inner = [part for child in children for part in meaning(child)]
    return [(tag, [inner])] if tag == "msqrt" else inner


def _merged(tag: str, parts: list[list[Any]]) -> tuple[str, list[list[Any]]]:
    """Return scripts on a letter that has one already as both at once; Typst sets them so."""
    if tag in ("msub", "msup") and len(parts[0]) == 1 and isinstance(parts[0][0], tuple):
        inner, (base, *scripts) = parts[0][0]
        if (inner, tag) == ("msub", "msup"):
            return "msubsup", [base, *scripts, parts[1]]
        if (inner, tag) == ("msup", "msub"):
            return "msubsup", [base, parts[1], *scripts]
    return tag, parts


def assert_same(formulas: list[str]) -> None:
    """Assert that both readings agree."""
    expected = pandoc.mathml(formulas)
    found = read_back(formulas)
    assert len(found) == len(formulas)
    for formula, tree in zip(formulas, found, strict=True):
        assert meaning(tree) == meaning(expected[formula]), formula


@pytest.mark.parametrize("formula", FORMULAS)
def test_typst_reads_what_the_latex_says(formula: str) -> None:
    assert_same([formula])


LETTERS = st.sampled_from([*"abcxyzkm", r"\omega", r"\zeta", r"\Omega", "2", "1.5", "10", r"\pi"])


def _grown(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    two = st.tuples(inner, inner)
    return st.one_of(
        two.map(lambda p: rf"\frac{{{p[0]}}}{{{p[1]}}}"),
        two.map(lambda p: rf"{{{p[0]}}}^{{{p[1]}}}"),
        two.map(lambda p: rf"{{{p[0]}}}_{{{p[1]}}}"),
        two.map(lambda p: rf"{p[0]} + {p[1]}"),
        two.map(lambda p: rf"{p[0]}\,{p[1]}"),
        two.map(lambda p: rf"{p[0]}/{p[1]} : {p[1]}, {p[0]}"),
        inner.map(lambda i: rf"\sqrt{{{i}}}"),
        inner.map(lambda i: rf"\left({i}\right)"),
        inner.map(lambda i: rf"\left[{i}\right]^{{2}}"),
        inner.map(lambda i: rf"\left|{i}\right|"),
        inner.map(lambda i: rf"({i})"),
        inner.map(lambda i: rf"\ddot{{{i}}}"),
        two.map(lambda p: rf"\begin{{bmatrix}}{p[0]}&{p[1]}\\{p[1]}&0\end{{bmatrix}}"),
        two.map(lambda p: rf"\sqrt[{p[0]}]{{{p[1]}}}"),
        inner.map(lambda i: rf"\sum_{{i=1}}^{{n}} {i}"),
    )


@settings(deadline=None, max_examples=15)
@given(st.lists(st.recursive(LETTERS, _grown, max_leaves=9), min_size=1, max_size=25))
def test_any_nesting_survives(formulas: list[str]) -> None:
    assert_same(list(dict.fromkeys(formulas)))


def test_lines_over_and_bold_letters_are_kept() -> None:
    # what Typst's export does not tell: it drops the line, and both sides normalise letters
    formulas = [r"\overline{abc}", r"\mathbf{M}\boldsymbol{\omega}", r"\mathrm{x}+x"]
    trees = pandoc.mathml(formulas)
    assert [math_typst.equation(trees[f]) for f in formulas] == [
        "overline(a b c)",
        "\U0001d474 \U0001d74e",
        "upright(x)\\+x",
    ]


def test_two_runs_of_letters_stay_apart() -> None:
    tree = pandoc.mathml([r"ab\mathrm{cd}e"])[r"ab\mathrm{cd}e"]
    assert math_typst.equation(tree) == 'a b"cd"e'


@pytest.mark.parametrize("formula", [r"\frac{a", r"\unknown{x}"])
def test_a_formula_that_is_not_latex_is_named(formula: str) -> None:
    with pytest.raises(PublishError, match="cannot be set") as caught:
        pandoc.mathml([r"x^2", formula])
    assert repr(formula) in str(caught.value)


def test_an_empty_formula_is_refused() -> None:
    with pytest.raises(PublishError, match="empty"):
        pandoc.mathml([" "])


def test_what_cannot_be_set_is_refused_not_dropped() -> None:
    tree = pandoc.mathml([r"\boxed{x}"])[r"\boxed{x}"]
    with pytest.raises(PublishError, match="menclose"):
        math_typst.equation(tree)
