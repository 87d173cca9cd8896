"""One document structure from an executed notebook: numbered once, every reference resolved."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Iterator, Mapping
from typing import Any, Literal, cast

from reportgen.errors import PublishError
from reportgen.publish import front, markdown, nodes, pandoc
from reportgen.publish.blocks import converted
from reportgen.publish.house import House
from reportgen.publish.numbering import Numbering
from reportgen.sheet.blocks import BLOCK_MIME, RESULTS_MIME, Results

Notebook = Mapping[str, Any]


def document(
    notebook: Notebook, house: House, attached: Iterable[str], listing: bool
) -> nodes.Document:
    """Return the structure that both outputs are made from.

    Parameters
    ----------
    notebook
        Executed notebook; its code cells hold blocks, one of them the results.
    house
        Letterhead.
    attached
        Names of the files attached to the PDF.
    listing
        Whether to keep the cells' code for the appendix.

    Raises
    ------
    PublishError
        If the notebook has no results, a cell failed, an id is used twice, or a
        reference leads nowhere.
    """
    cells = list(notebook["cells"])
    results = results_of(cells)
    about = results["document"]
    numbering = Numbering()
    body = tuple(_body(cells, numbering))
    numbering.results(results)
    page_one = tuple(front.page_one(results))
    made = nodes.Document(
        number=str(about["number"]),
        revision=str(about["revision"]),
        title=str(about["title"]),
        status=str(about["status"]),
        date=_date(about["date"]),
        machine=str(results["machine"]),
        author=str((about.get("prepared") or {}).get("name", "")),
        paper=_paper(house, results),
        fields=tuple(front.title_block(results, house)),
        front=page_one,
        body=body,
        closing=tuple(front.closing(results, house, attached, numbering)),
        code=tuple(_code(cells)) if listing else (),
        targets=numbering.targets,
    )
    _check_references(made)
    return made


def results_of(cells: list[Mapping[str, Any]]) -> Results:
    """Return the results that one of the cells holds."""
    found = [data for cell in cells for data in _outputs(cell, RESULTS_MIME)]
    if len(found) != 1:
        raise PublishError(
            f"the notebook holds {len(found) or 'no'} results; the last cell of a template "
            "gives them once (sheet.finish)"
        )
    results = cast(Results, found[0])
    if results.get("format") != 1:
        raise PublishError(f"the results are of format {results.get('format')!r}; 1 is known")
    return results


def _outputs(cell: Mapping[str, Any], mime: str) -> Iterator[dict[str, Any]]:
    if cell["cell_type"] != "code":
        return
    for output in cell.get("outputs", ()):
        if output["output_type"] == "error":
            raise PublishError(
                f"a cell of the notebook ended in an error: {output.get('ename', '')}: "
                f"{output.get('evalue', '')}"
            )
        data = output.get("data", {}).get(mime)
        if data is not None:
            yield json.loads("".join(data)) if isinstance(data, str | list) else data


def _body(cells: list[Mapping[str, Any]], numbering: Numbering) -> Iterator[nodes.Block]:
    prose = [_source(cell) for cell in cells if cell["cell_type"] == "markdown"]
    trees = iter(pandoc.prose(prose))
    for cell in cells:
        if cell["cell_type"] == "markdown":
            for block in markdown.blocks(next(trees), numbering.section):
                yield numbering.prose_table(block) if isinstance(block, nodes.Table) else block
        else:
            for data in _outputs(cell, BLOCK_MIME):
                yield converted(data, numbering)


def _code(cells: list[Mapping[str, Any]]) -> Iterator[str]:
    for cell in cells:
        tags = cell.get("metadata", {}).get("tags", [])
        source = _source(cell).strip("\n")
        if cell["cell_type"] == "code" and source and "injected-parameters" not in tags:
            yield source


def _source(cell: Mapping[str, Any]) -> str:
    source = cell["source"]
    return source if isinstance(source, str) else "".join(source)


def _date(date: object) -> str:
    text = str(date)[:10]
    if not re.fullmatch(r"\d{4}-\d\d-\d\d", text):
        raise PublishError(f"the document's date is {date!r}; YYYY-MM-DD is what would do")
    return text


def _paper(house: House, results: Results) -> Literal["a4", "letter"]:
    return house.paper or ("letter" if results["units"] == "us" else "a4")


def _check_references(made: nodes.Document) -> None:
    missing = [
        inline.target
        for block in (*made.front, *made.body, *made.closing)
        for inline in nodes.inlines_of(block)
        if isinstance(inline, nodes.Reference) and inline.target not in made.targets
    ]
    if missing:
        raise PublishError(
            "no section, table, figure, equation, result or criterion has the id "
            + ", ".join(repr(target) for target in dict.fromkeys(missing))
        )
