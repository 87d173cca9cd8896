"""All formulas of a report: each parsed once, ready for both outputs and in words."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeVar
from xml.etree.ElementTree import Element

from reportgen.errors import PublishError
from reportgen.publish import math_html, math_typst, math_words, nodes, pandoc

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Formulas:
    """The MathML tree of each formula, by its LaTeX."""

    trees: dict[str, Element]

    @classmethod
    def of(cls, document: nodes.Document) -> Formulas:
        """Parse every formula of a report in one run of pandoc."""
        blocks = (*document.front, *document.body, *document.closing)
        return cls(pandoc.mathml([f for block in blocks for f in nodes.formulas_of(block)]))

    def words(self, latex: str) -> str:
        """Return a formula in words."""
        return self._named(latex, math_words.words)

    def html(self, latex: str, words: str = "", display: bool = False) -> str:
        """Return a formula as MathML for a page."""
        said = words or self.words(latex)
        return self._named(latex, lambda tree: math_html.math(tree, said, display))

    def typst(self, latex: str) -> str:
        """Return a formula as the body of a Typst equation."""
        return self._named(latex, math_typst.equation)

    def _named(self, latex: str, make: Callable[[Element], T]) -> T:
        try:
            return make(self.trees[latex])
        except PublishError as error:
            raise PublishError(f"the formula {latex!r} cannot be set: {error}") from error
