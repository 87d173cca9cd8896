"""Histograms of the margins of a tolerance study."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reportgen.sheet.figures import BLUE, GREY, INK, LINES, RED, new

if TYPE_CHECKING:
    from reportgen.sheet.sheet import Sheet
    from reportgen.study.study import Study

BINS = 40


def varies(row: Any) -> bool:
    """Tell whether margins differ by more than rounding."""
    known = row[~np.isnan(row)]
    return bool(known.size) and float(np.ptp(known)) > 1e-9 * float(np.abs(known).max())


def histogram(sheet: Sheet, study: Study, chosen: list[int]) -> None:
    """Show the margins against each chosen criterion, those not met hatched."""
    rows = (len(chosen) + 1) // 2
    columns = min(2, len(chosen))
    figure, axes = new(rows, columns, height=0.35 + 1.85 * rows, squeeze=False)
    words = []
    for ax, i in zip(axes.flat, chosen, strict=False):
        row = study.outcomes.margin[i]
        known = 100 * row[~np.isnan(row)]
        edges = np.histogram_bin_edges(known, BINS)
        for keep, color, hatch, name in (
            (known >= 0, BLUE, "", "met"),
            (known < 0, RED, "////", "not met"),
        ):
            counts, _ = np.histogram(known[keep], edges)
            if counts.any():
                ax.bar(
                    edges[:-1],
                    100 * counts / row.size,
                    np.diff(edges),
                    align="edge",
                    color=color if not hatch else "white",
                    edgecolor=color,
                    hatch=hatch,
                    linewidth=0.6,
                    label=f"C{i + 1} {name}",
                )
        ax.axvline(0.0, color=INK, linewidth=1.0)
        stated = study.nominal[i].outcome.margin
        if stated is not None:
            ax.axvline(100 * stated, color=GREY, linewidth=1.0, linestyle=(0, (4, 2)))
        ax.set_title(f"C{i + 1}", loc="left")
        ax.set_xlabel("Margin (% of the limit)")
        ax.set_ylabel("Rotors (%)")
        words.append(f"C{i + 1} from {known.min():.3g} % to {known.max():.3g} %")
    for ax in list(axes.flat)[len(chosen) :]:
        ax.set_visible(False)
    sheet.figure(
        "histogram",
        figure,
        "Margins of the sampled rotors; hatched: the criterion is not met; dashed: as stated, "
        "without tolerances",
        f"Histograms of the margins: {'; '.join(words)}.",
    )


def cumulative(sheet: Sheet, study: Study, chosen: list[int]) -> None:
    """Show which share of the rotors has no more than a margin; at zero it is the share failing."""
    figure, ax = new(1, 1, height=2.8)
    words = []
    for style, i in zip(LINES, chosen, strict=False):
        row = study.outcomes.margin[i]
        known = np.sort(row[~np.isnan(row)])
        share = 100 * np.arange(1, known.size + 1) / known.size
        keep = np.unique(np.linspace(0, known.size - 1, 400).astype(int))
        ax.plot(100 * known[keep], share[keep], label=f"C{i + 1}", **style)
        middle = 100 * float(np.median(known))
        words.append(f"half of the rotors have at most {middle:.3g} % against C{i + 1}")
    ax.axvline(0.0, color=INK, linewidth=1.0)
    ax.set_xlabel("Margin (% of the limit)")
    ax.set_ylabel("Rotors with at most this (%)")
    ax.set_ylim(0, 100)
    ax.legend(fontsize=7.6)
    sheet.figure(
        "cumulative",
        figure,
        "Share of the sampled rotors with no more than a margin; where a curve meets the line at "
        "zero, the share that fails is read",
        f"Cumulative shares: {'; '.join(words)}.",
    )
