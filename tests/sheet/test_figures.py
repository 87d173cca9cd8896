"""Figures: one style that needs no colour, and the numbers behind what is drawn."""

from __future__ import annotations

import numpy as np
import pytest

from reportgen.publish.house import contrast_on_white
from reportgen.sheet import figures


def test_each_line_is_told_apart_without_colour() -> None:
    dashes = [str(style["linestyle"]) for style in figures.LINES]
    assert len(set(dashes)) == len(dashes) >= 5


def test_each_colour_stands_out_from_the_paper() -> None:
    # WCAG 2.1, success criterion 1.4.11: 3:1 for what must be seen in a drawing
    for style in figures.LINES:
        assert contrast_on_white(style["color"]) >= 4.5


def test_the_same_figure_gives_the_same_text() -> None:
    def draw() -> str:
        figure, ax = figures.new()
        ax.plot([0, 1, 2], [0, 1, 4], label="a", **figures.LINES[0])
        return figures.drawing(figure)[0]

    assert draw() == draw()


def test_axes_tell_where_they_lie_and_what_they_hold() -> None:
    figure, (upper, lower) = figures.new(2, 1, sharex=True)
    upper.plot([0, 10, 20], [1, 2, 3], label="one")
    lower.semilogy([0, 10, 20], [1, 10, 100], label="two")
    upper.axvline(5)  # no name: not read out
    lower.set_xlabel("Speed (r/min)")
    upper.set_ylabel("Amplitude (µm)")
    svg, axes = figures.drawing(figure)
    assert svg.startswith("<svg")
    assert [one["x_title"] for one in axes] == ["Speed (r/min)"] * 2
    assert axes[0]["y_title"] == "Amplitude (µm)"
    assert axes[1]["y_scale"] == "log"
    assert [curve["name"] for one in axes for curve in one["curves"]] == ["one", "two"]
    left, top, width, height = axes[0]["box"]
    assert 0 < left < left + width <= 1
    assert 0 <= top < top + height < axes[1]["box"][1]


def test_panels_side_by_side_have_the_title_of_their_row() -> None:
    figure, (left, right) = figures.new(1, 2)
    for ax in (left, right):
        ax.plot([0, 1, 2], [0, 1, 2], label="path")
    left.set_ylabel("y (mm)")
    assert [one["y_title"] for one in figures.drawing(figure)[1]] == ["y (mm)", "y (mm)"]


def test_a_long_curve_keeps_its_peak() -> None:
    x = np.linspace(0, 1, 50_001)
    y = 1 / (1 + ((x - 0.4321) * 1e4) ** 2)
    figure, ax = figures.new()
    ax.plot(x, y, label="sharp")
    curve = figures.drawing(figure)[1][0]["curves"][0]
    assert len(curve["x"]) < 700
    assert max(curve["y"]) == pytest.approx(y.max(), rel=1e-5)
    assert curve["x"] == sorted(curve["x"])


def test_named_bars_are_read_out_by_their_middles() -> None:
    figure, ax = figures.new()
    ax.bar([0, 1, 2], [3, 0, 5], 1.0, align="edge", label="rotors")
    ax.bar([0, 1], [1, 1])
    curves = figures.drawing(figure)[1][0]["curves"]
    assert curves == [{"name": "rotors", "x": [0.5, 2.5], "y": [3.0, 5.0]}]
