"""Formulas in words, as a screen reader says them."""

from __future__ import annotations

import pytest

from reportgen.publish import math_words, pandoc

SAID = {
    r"\omega_n = \sqrt{\frac{k}{m}}": "omega sub n equals square root of k over m end root",
    r"\frac{a+b}{c}": "(a plus b) over c",
    r"62\,\mathrm{kg}": "62 kg",
    r"\ddot{z}^{2}": "(z double dot) squared",
    r"\sum_{i=1}^{n} x_i": "sum from i equals 1 to n x sub i",
    r"\Omega + \mathbf{M}": "capital omega plus M",
    r"\lim_{x\to 0} \sin x": "lim with x to 0 below sin x",
    r"\varphi = \arctan \frac{a}{b}": "phi equals arctan a over b",
    r"10^{6}\,\mathrm{N/m}": "10 to the power 6 N over m",
}


@pytest.mark.parametrize(("formula", "said"), SAID.items())
def test_a_formula_is_said_as_a_colleague_would(formula: str, said: str) -> None:
    assert math_words.words(pandoc.mathml([formula])[formula]) == said
