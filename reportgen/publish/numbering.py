"""Numbers of sections, figures, tables, equations, criteria and results; given once."""

from __future__ import annotations

from dataclasses import replace

from reportgen.errors import PublishError
from reportgen.publish import nodes
from reportgen.sheet.blocks import Results

_NAMES = {"table": "Table", "figure": "Figure", "equation": "Equation"}


class Numbering:
    """Counts as the report is read from its beginning, and remembers where each id leads."""

    def __init__(self) -> None:
        self.targets: dict[str, nodes.Target] = {}
        self._counts = dict.fromkeys(_NAMES, 0)
        self._sections: list[int] = []
        self._headings: dict[str, nodes.Target] = {}

    def section(self, level: int, name: str, body: nodes.Inlines) -> nodes.Heading:
        """Return a section, numbered; a level that skips one is taken as the next that fits."""
        level = min(level, len(self._sections) + 1)
        kept = [*self._sections, 0][:level]
        kept[-1] += 1
        self._sections = kept
        number = ".".join(str(n) for n in kept)
        target = nodes.Target(f"section-{number.replace('.', '-')}", f"Section {number}")
        self._headings.setdefault(name, target)
        return nodes.Heading(level, target.anchor, number, body)

    def block(self, kind: str, block_id: str) -> tuple[str, int]:
        """Count a table, figure or equation; return its anchor and number."""
        self._counts[kind] += 1
        number = self._counts[kind]
        target = nodes.Target(f"{kind}-{number}", f"{_NAMES[kind]} {number}")
        if block_id in self.targets:
            raise PublishError(f"two blocks are named {block_id!r}; give each its own name")
        if block_id:
            self.targets[block_id] = target
        return target.anchor, number

    def prose_table(self, table: nodes.Table) -> nodes.Table:
        """Return a table of the prose with its number, if it has a caption."""
        if not table.caption:
            return table
        anchor, number = self.block("table", "")
        return replace(table, anchor=anchor, label=f"Table {number}")

    def results(self, results: Results) -> None:
        """Count criteria and results; a result named as its block is that block.

        Called after the body: what a block is named comes first, then criteria, results
        and the names that sections have from their titles.
        """
        for n, criterion in enumerate(results["criteria"], 1):
            target = nodes.Target(f"criterion-{n}", f"criterion C{n}")
            taken = self.targets.setdefault(criterion["id"], target) is not target
            if taken and criterion["where"] != criterion["id"]:
                raise PublishError(
                    f"a block and a criterion are both named {criterion['id']!r}; "
                    "give each its own name"
                )
        for n, result in enumerate(results["results"], 1):
            self.targets.setdefault(result["id"], nodes.Target(f"result-{n}", f"result R{n}"))
        for name, target in self._headings.items():
            if name:
                self.targets.setdefault(name, target)
