"""Publishing as one call."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from reportgen.publish import nodes
from reportgen.publish.document import document
from reportgen.publish.formulas import Formulas
from reportgen.publish.house import House
from reportgen.publish.html_page import html
from reportgen.publish.pdf import pdf


@dataclass(frozen=True, slots=True)
class Published:
    """A report in its two forms."""

    html: bytes
    pdf: bytes


def publish(
    notebook: Mapping[str, Any],
    *,
    house: House | None = None,
    attachments: Mapping[str, bytes] | None = None,
    listing: bool = True,
) -> Published:
    """Return a report as HTML and as PDF, both from one structure.

    Parameters
    ----------
    notebook
        Executed notebook, as nbformat reads it.
    house
        Letterhead, see :func:`reportgen.publish.read_house`; the plain one where None.
    attachments
        Files for the PDF by name, in the order in which readers list them.
    listing
        Whether the HTML holds the code of the calculation as a folded appendix.

    Raises
    ------
    PublishError
        If the report cannot be rendered truthfully: a reference that leads nowhere, a
        formula that is not understood, a drawing that runs or loads something.
    """
    letterhead = house or House()
    files = dict(attachments or {})
    made, formulas = prepared(notebook, letterhead, files, listing)
    return Published(
        html=html(made, formulas, letterhead),
        pdf=pdf(made, formulas, letterhead, files),
    )


def prepared(
    notebook: Mapping[str, Any], house: House, files: Mapping[str, bytes], listing: bool
) -> tuple[nodes.Document, Formulas]:
    """Return the structure of a report, and its formulas."""
    made = document(notebook, house, files, listing)
    return made, Formulas.of(made)
