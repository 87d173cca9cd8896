"""A made-up calculation as an executed notebook: every kind of block, awkward text included.

The machine, the people and the numbers are invented; nothing here is computed by reportgen.
"""

from __future__ import annotations

import io
import math
from functools import cache
from typing import Any

BLOCK = "application/vnd.reportgen.block+json"
RESULTS = "application/vnd.reportgen.results+json"

HOSTILE = [
    "<script>alert('x')</script><img src=x onerror=alert(1)>",
    '#import "x": *; #panic(1) $x$ *bold* _it_ `raw` @ref <label> // comment',
    r"\input{/etc/passwd} \write18{ls} $\frac{1}{2}$ %",
    "{{ 7*7 }} {% raw %} ${7*7} \"quoted\" 'single' & ampersand &lt;",
    "中文 日本語 한국어",
    "עברית ועוד and العربية",
    "emoji 🙂🚀 and flag 🇨🇭",
    "bell \x07 escape \x1b override \u202e reversed \u202c null \x00 end",
    "W" + "o" * 180 + "rd",
    "combining e\u0301 a\u0308 x\u0307 and ﬁ ligature",
]


def block(cell_block: dict[str, Any]) -> dict[str, Any]:
    """Return a notebook output that holds a block."""
    return {
        "output_type": "display_data",
        "metadata": {},
        "data": {BLOCK: cell_block, "text/plain": "block"},
    }


def code(source: str, *outputs: dict[str, Any], tags: tuple[str, ...] = ()) -> dict[str, Any]:
    """Return a code cell."""
    return {
        "cell_type": "code",
        "id": f"c{abs(hash(source)) % 10**6}",
        "metadata": {"tags": list(tags)} if tags else {},
        "execution_count": 1,
        "source": source,
        "outputs": list(outputs),
    }


def prose(source: str) -> dict[str, Any]:
    """Return a markdown cell."""
    return {"cell_type": "markdown", "id": "m", "metadata": {}, "source": source}


def notebook(*cells: dict[str, Any]) -> dict[str, Any]:
    """Return a notebook of cells, each with an id of its own."""
    numbered = [{**cell, "id": f"cell-{n}"} for n, cell in enumerate(cells)]
    return {"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": numbered}


def results(**changes: Any) -> dict[str, Any]:
    """Return results of the made-up calculation, with changes to their top level."""
    criteria = [
        criterion("separation", "Separation of rated speed from the critical", "meets", "37.2 %",
                  "20 %", "86 %", "critical-speed", "at least"),
        criterion("amplitude", "Whirl at rated speed", "does not meet", "84.1 µm 0-peak",
                  "60 µm 0-peak", "−40 %", "whirl-table", "at most"),
        criterion("clearance", "Clearance during passage", "not assessed", "–", "0.4 mm", "–", "",
                  "at most", reason="no radial clearance is stated for the seal"),
    ]  # fmt: skip
    made = {
        "format": 1,
        "document": {
            "number": "CAL-0001",
            "title": "Lateral vibration of a made-up cooling fan",
            "revision": "B",
            "status": "for review",
            "date": "2026-03-02",
            "project": "Invented Works, line 2",
            "client_reference": "IW-77",
            "history": [
                {
                    "revision": "A",
                    "date": "2026-01-15",
                    "text": "First issue for comment",
                    "by": "A. Nyman",
                },
                {
                    "revision": "B",
                    "date": "2026-03-02",
                    "text": "Shaft mass from weight table",
                    "by": "A. Nyman",
                },
            ],
            "prepared": {"name": "A. Nyman", "role": "Mechanical engineer"},
            "checked": {"name": "B. Okoro", "role": "Lead engineer"},
            "approved": None,
        },
        "template": {"name": "sample", "digest": "sha512:0123456789abcdef", "origin": "ours"},
        "units": "si",
        "conclusion": [
            "The rotor does not meet 1 of the 3 stated criteria: whirl at rated speed is "
            "84.1 µm against 60 µm (",
            {"ref": "whirl-table"},
            "); clearance is not assessed.",
        ],
        "asked": [
            "How far does rated speed lie from the critical speed ",
            {"math": r"n_\mathrm{c}"},
            ", and does the whirl meet the project's limit?",
        ],
        "machine": "Cooling fan, tag K-12, hot gas recirculation",
        "results": [
            result("n-c", "Critical speed", r"n_\mathrm{c}", "1672 rpm", "critical-speed"),
            result("whirl", "Largest whirl", r"\hat{z}", "84.1 µm 0-peak", "response"),
        ],
        "criteria": criteria,
        "holds": [
            {
                "id": "H1",
                "kind": "preliminary",
                "text": "Stiffness of the support is preliminary (beam calculation, section 4)",
            },
            {
                "id": "H2",
                "kind": "assumption",
                "text": "Damping ratio 0.03 is assumed; to be confirmed by test",
            },
        ],
        "cautions": ["A rotor that rubs can burst."],
        "not_assessed": ["Torsional vibration"],
        "series": {},
    }
    return made | changes


def criterion(
    name: str, title: str, verdict: str, value: str, limit: str, margin: str, where: str,
    sense: str, reason: str = "",
) -> dict[str, Any]:  # fmt: skip
    """Return a criterion as page one shows it."""
    return {
        "id": name, "title": title, "source": "Project specification PS-4", "clause": "5.2",
        "value": None if value == "–" else 1.0, "limit": 1.0, "sense": sense, "unit": "m",
        "margin": None, "value_shown": value, "limit_shown": limit, "margin_shown": margin,
        "verdict": verdict, "reason": reason, "where": where,
    }  # fmt: skip


def result(name: str, title: str, symbol: str, shown: str, where: str) -> dict[str, Any]:
    """Return a headline result."""
    return {
        "id": name, "title": title, "symbol": symbol, "value": 1.0, "unit": "m",
        "quantity": "length",
        "shown": shown, "measure": "none", "method": "closed form", "where": where,
        "second": {
            "method": "search", "value": 1.0, "difference": 0.0, "tolerance": 1e-6, "agrees": True,
        },
    }  # fmt: skip


@cache
def figure_svg(kind: int = 0) -> str:
    """Return a drawing by matplotlib, with nothing of the time in it."""
    from matplotlib import rc_context
    from matplotlib.figure import Figure

    with rc_context({"svg.hashsalt": "x", "svg.fonttype": "path", "font.size": 8.5}):
        figure = Figure(figsize=(6.3, 3.1))
        axes = figure.add_axes((0.1, 0.16, 0.86, 0.78))
        for curve, dash in zip(curves(kind), ("-", "--", ":"), strict=False):
            axes.plot(curve["x"], curve["y"], dash, label=curve["name"])
        axes.set(xlim=(0, 3000), ylim=(0, 100), xlabel="Speed, rpm", ylabel="Whirl, µm 0-peak")
        axes.legend(frameon=False)
        out = io.StringIO()
        figure.savefig(out, format="svg", metadata={"Date": None, "Creator": None})
    return out.getvalue()[out.getvalue().index("<svg") :]


def curves(kind: int = 0) -> list[dict[str, Any]]:
    """Return curves of an invented resonance."""
    speeds = [5.0 * n for n in range(1, 600)]
    found = []
    for name, damping in (("damping 0.03", 0.03), ("damping 0.06, <b>high</b>", 0.06)):
        ratio = [s / (1672 + 40 * kind) for s in speeds]
        whirl = [5 * r * r / math.hypot(1 - r * r, 2 * damping * r) for r in ratio]
        found.append({"name": name, "x": speeds, "y": [round(w, 4) for w in whirl]})
    return found


def figure_block(name: str, kind: int = 0) -> dict[str, Any]:
    """Return a figure block."""
    return {
        "kind": "figure",
        "id": name,
        "caption": ["Whirl against speed, ", {"math": r"\zeta = 0.03"}, " and 0.06."],
        "alt": "The whirl peaks at 1672 rpm, above the rated speed of 1050 rpm.",
        "svg": figure_svg(kind),
        "axes": [
            {
                "box": [0.1, 0.06, 0.86, 0.78],
                "x_title": "Speed, rpm",
                "y_title": "Whirl, µm 0-peak",
                "x_range": [0, 3000],
                "y_range": [0, 100],
                "x_scale": "linear",
                "y_scale": "linear",
                "curves": curves(kind),
            }
        ],
    }


def long_table(name: str = "whirl-table", rows: int = 70) -> dict[str, Any]:
    """Return a table of more rows than a page holds."""
    return {
        "kind": "table",
        "id": name,
        "caption": ["Whirl at each speed; peak near ", {"math": r"n_\mathrm{c}"}],
        "columns": [
            {"title": "Speed"},
            {"title": "Ratio", "align": "right"},
            {"title": ["Whirl, ", {"math": r"|z|"}], "align": "right"},
            {"title": "Remark"},
        ],
        "rows": [
            [
                f"{50 * n} rpm",
                f"{50 * n / 1672:.3f}",
                f"{n * 1.2:.1f} µm",
                "in the running range" if n % 7 == 0 else "",
            ]
            for n in range(1, rows + 1)
        ],
        "row_header": True,
        "note": ["Amplitudes are 0-peak; see ", {"ref": "response"}, "."],
    }  # fmt: skip


def full() -> dict[str, Any]:
    """Return the notebook with every kind of block."""
    return notebook(
        code("case = None", tags=("parameters",)),
        code("case = {'a': 1}", tags=("injected-parameters",)),
        prose(
            "# Purpose and scope\n\nThis *made-up* calculation finds the whirl of a rotor, "
            "**one mass** on a shaft, see [](#critical-speed) and [the response](#response). "
            "The method is in [](#method).\n\n- first item with $\\zeta = 0.03$\n- second item\n\n"
            "1. one\n2. two\n\n> A quotation.\n\n<b>not markup</b> and `code <x>`.\n"
        ),
        prose(
            "# Method\n\nThe equation of motion is\n\n$$ m\\,\\ddot{z} + c\\,\\dot{z} + k\\,z = "
            "m\\,e\\left(\\dot{\\theta}^{2} - \\mathrm{i}\\,\\ddot{\\theta}\\right)"
            "\\mathrm{e}^{\\mathrm{i}\\theta} $$\n\nand in matrix form\n\n"
            "$$ \\begin{bmatrix} m & 0 \\\\ 0 & m \\end{bmatrix} \\ddot{\\mathbf{q}} + "
            "\\mathbf{K}\\,\\mathbf{q} = \\begin{cases} \\mathbf{f} & t < T \\\\ \\mathbf{0} & "
            "\\text{otherwise} \\end{cases} $$\n\n| Symbol | Meaning | Unit |\n|:--|:--|--:|\n"
            "| $m$ | mass | kg |\n| $k$ | stiffness | N/m |\n\n## Units\n\nSI, and a "
            "[web page](https://example.org/a?b=1&c=2).\n\n### Deeper\n\nText.\n"
        ),
        prose("# Results\n\n## Critical speed"),
        code(
            "equation()",
            block(
                {
                    "kind": "equation",
                    "id": "critical-speed",
                    "title": "Critical speed",
                    "formula": r"n_\mathrm{c} = \frac{60}{2\pi}\sqrt{\frac{k}{m}}",
                    "substituted": r"\frac{60}{2\pi}\sqrt{\frac{1.9\times 10^{6}\,\mathrm{N/m}}"
                    r"{62\,\mathrm{kg}}}",
                    "result": r"n_\mathrm{c} = 1672\,\mathrm{rpm}",
                    "alt": "Critical speed: 1672 rpm",
                    "note": ["Undamped; see ", {"ref": "separation"}, " and ", {"ref": "n-c"}, "."],
                }
            ),
            block(
                {
                    "kind": "paragraph",
                    "text": ["The ratio is ", {"strong": "0.628"}, ", below one."],
                }
            ),
        ),
        prose("## Response"),
        code("figure()", block(figure_block("response"))),
        code("table()", block(long_table())),
        code("figure(1)", block(figure_block("response-soft", 1))),
        code(
            "many()",
            *(
                block(
                    {
                        "kind": "equation",
                        "id": f"long-{n}",
                        "title": f"A long formula, {n} terms",
                        "formula": "S = "
                        + " + ".join(rf"\frac{{a_{{{i}}}}}{{b_{{{i}}}^{{2}}}}" for i in range(n)),
                    }
                )
                for n in (3, 30)
            ),
        ),
        prose("# Awkward text"),
        code(
            "hostile()",
            block({"kind": "list", "items": HOSTILE}),
            block(
                {
                    "kind": "table",
                    "id": "hostile",
                    "caption": HOSTILE[0],
                    "columns": [
                        {"title": HOSTILE[1]},
                        {"title": "Value", "align": "right"},
                        {"title": "Text"},
                    ],
                    "rows": [[f"{n}", "1.0", text] for n, text in enumerate(HOSTILE)],
                }
            ),
        ),
        prose("# Cautions"),
        code(
            "caution()",
            block(
                {
                    "kind": "notice",
                    "level": "caution",
                    "title": "Contact",
                    "text": [
                        "Beyond the clearance the result is void; ",
                        {"ref": "clearance"},
                        ".",
                    ],
                }
            ),
            block(
                {
                    "kind": "notice",
                    "level": "finding",
                    "title": "Finding",
                    "text": "Whirl exceeds the limit.",
                }
            ),
        ),
        code("finish()", with_results(results())),
    )


def with_results(made: dict[str, Any]) -> dict[str, Any]:
    """Return an output that closes the sheet with these results."""
    return {"output_type": "display_data", "metadata": {}, "data": {RESULTS: made}}


def small(*blocks: dict[str, Any], text: str = "", **changes: Any) -> dict[str, Any]:
    """Return a notebook with a few blocks, and results that refer to nothing else."""
    made = results(criteria=[], results=[], conclusion="Done.") | changes
    cells = [prose(text)] if text else []
    return notebook(*cells, code("x = 1", *map(block, blocks)), code("end", with_results(made)))
