"""The exporters as nbconvert calls them."""

from __future__ import annotations

import io
from types import ModuleType

import nbformat
import pikepdf

from reportgen.publish.exporters import ReportHTMLExporter, ReportPDFExporter


def test_the_html_exporter_gives_the_page(sample: ModuleType) -> None:
    notebook = nbformat.from_dict(sample.small(text="# Hello"))
    page, resources = ReportHTMLExporter().from_notebook_node(notebook)
    assert page.startswith("<!DOCTYPE html>")
    assert "Hello" in page
    assert resources["output_extension"] == ".html"


def test_the_pdf_exporter_attaches_results_and_notebook(sample: ModuleType) -> None:
    notebook = nbformat.from_dict(sample.small(text="# Hello"))
    made, resources = ReportPDFExporter().from_notebook_node(notebook)
    assert resources["output_extension"] == ".pdf"
    with pikepdf.open(io.BytesIO(made)) as opened:
        assert sorted(opened.attachments) == ["calculation.ipynb", "results.json"]
