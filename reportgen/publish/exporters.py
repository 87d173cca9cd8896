"""The report's two forms as nbconvert exporters.

``jupyter nbconvert --to reportgen-html`` and ``--to reportgen-pdf`` render an executed
notebook just as ``reportgen run`` does.
"""

from __future__ import annotations

import json
from typing import Any

from nbconvert.exporters import Exporter
from nbformat import NotebookNode
from traitlets import Bool, Unicode, default

from reportgen.publish.api import prepared
from reportgen.publish.document import results_of
from reportgen.publish.house import House, read_house
from reportgen.publish.html_page import html
from reportgen.publish.pdf import pdf


class _ReportExporter(Exporter):
    """What both exporters share."""

    house = Unicode("", help="Path of a house file: logo, colours, names, closing text.").tag(
        config=True
    )
    listing = Bool(True, help="Keep the code of the calculation as an appendix.").tag(config=True)

    def _house(self) -> House:
        return read_house(self.house) if self.house else House()


class ReportHTMLExporter(_ReportExporter):
    """Exports an executed calculation notebook as one HTML file."""

    export_from_notebook = "Calculation report (HTML)"
    output_mimetype = "text/html"

    @default("file_extension")
    def _file_extension_default(self) -> str:
        return ".html"

    def from_notebook_node(  # type: ignore[override]
        self, nb: NotebookNode, resources: Any = None, **kw: Any
    ) -> tuple[str, dict[str, Any]]:
        """Return the page and nbconvert's resources."""
        notebook, carried = super().from_notebook_node(nb, resources, **kw)
        house = self._house()
        made, formulas = prepared(notebook, house, {}, self.listing)
        return html(made, formulas, house).decode(), carried


class ReportPDFExporter(_ReportExporter):
    """Exports an executed calculation notebook as PDF/A-3, the notebook and results attached."""

    export_from_notebook = "Calculation report (PDF)"
    output_mimetype = "application/pdf"

    @default("file_extension")
    def _file_extension_default(self) -> str:
        return ".pdf"

    def from_notebook_node(  # type: ignore[override]
        self, nb: NotebookNode, resources: Any = None, **kw: Any
    ) -> tuple[bytes, dict[str, Any]]:
        """Return the PDF's bytes and nbconvert's resources."""
        notebook, carried = super().from_notebook_node(nb, resources, **kw)
        house = self._house()
        files = {
            "results.json": _json(results_of(notebook["cells"])),
            "calculation.ipynb": _json(notebook),
        }
        made, formulas = prepared(notebook, house, files, self.listing)
        return pdf(made, formulas, house, files), carried


def _json(value: Any) -> bytes:
    return (json.dumps(value, indent=1, ensure_ascii=False) + "\n").encode()
