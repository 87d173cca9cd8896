"""Opens a report in Chromium as readers do, and notes what it finds as plain JSON."""

from __future__ import annotations

import json
import math
import subprocess
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from axe_core_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page, sync_playwright

WIDTHS = (390, 768, 1280, 1920)
INSIDE = """() => [...document.querySelectorAll('a[href^="#"]')].filter(
    (a) => !document.getElementById(a.getAttribute('href').slice(1))).map((a) => a.href)"""
FIGURES = """() => [...document.querySelectorAll('figure')].map((f) => ({
    alt: f.querySelector('svg').getAttribute('aria-label'),
    height: f.getBoundingClientRect().height,
    whole: getComputedStyle(f).breakInside === 'avoid',
    titles: JSON.parse(f.querySelector('script.axes')?.textContent ?? '[]')
        .flatMap((axes) => [axes.x[0], axes.y[0]]),
    curves: f.querySelector('script.axes') !== null}))"""


@contextmanager
def chromium() -> Iterator[Browser]:
    """Give the browser that Debian installs."""
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(
            executable_path="/usr/bin/chromium", args=["--no-sandbox"]
        )
        yield browser
        browser.close()


def visit(report: Path, folder: Path) -> dict[str, Any]:
    """Return what a visit to a report finds; files it downloads or prints go to the folder."""
    with chromium() as browser:
        context = browser.new_context(
            viewport={"width": 1280, "height": 900}, reduced_motion="reduce"
        )
        page = context.new_page()
        seen = _listen(page)
        page.goto(report.as_uri())
        found: dict[str, Any] = {
            "keys": _keys(page),
            "outline": _outline(page),
            "text": page.inner_text("main"),
            "broken links": page.evaluate(INSIDE),
            "figures": page.evaluate(FIGURES),
            "axe": {"wide": _axe(page)},
            "conclusion": _conclusion(page),
            "hover": _hover(page),
            "data": _download(page, folder),
            "widths": _widths(page),
        }
        page.set_viewport_size({"width": 390, "height": 800})
        found["axe"]["phone"] = _axe(page, leaving_out=("svg", "math"))  # the same at any width
        found["print"] = _print(page, folder)
        found["scripts off"] = _scripts_off(browser, report)
        found |= seen
        context.close()
    return found


def _listen(page: Page) -> dict[str, list[str]]:
    seen: dict[str, list[str]] = {"console": [], "requests": []}
    page.on("console", lambda message: seen["console"].append(f"{message.type}: {message.text}"))
    page.on("pageerror", lambda error: seen["console"].append(f"page error: {error}"))
    page.on("request", lambda request: seen["requests"].append(request.url[:200]))
    return seen


def _outline(page: Page) -> list[str]:
    """Return numbered headings and captions in reading order."""
    parts = page.locator(".body :is(h2, h3), .body caption, .body figcaption, .equation-number")
    names: list[str] = parts.evaluate_all(
        """(all) => all.map((part) => {
            const name = part.querySelector('b');
            return (name ?? part).textContent.trim().replace(/\\s+/g, ' '); })"""
    )
    return names


def _axe(page: Page, leaving_out: tuple[str, ...] = ()) -> list[str]:
    context = {"exclude": [[name] for name in leaving_out]} if leaving_out else None
    broken = Axe().run(page, context, {"resultTypes": ["violations"]})["violations"]
    return [f"{rule['id']}: {node['html'][:200]}" for rule in broken for node in rule["nodes"]]


def _conclusion(page: Page) -> list[dict[str, Any]]:
    """Follow each number of the conclusion; return where it leads and whether that is in view."""
    found = []
    for link in page.locator(".notice.conclusion a").all():
        link.click()
        target = link.get_attribute("href") or ""
        page.wait_for_timeout(50)
        found.append(
            {
                "words": link.inner_text(),
                "target": page.locator(target).inner_text()[:400],
                "seen": page.locator(target).evaluate(
                    """(part) => { part.scrollIntoView({behavior: 'instant'});
                    const box = part.getBoundingClientRect();
                    return box.top < innerHeight && box.bottom > 0; }"""
                ),
            }
        )
        page.go_back()
    return found


def _first(page: Page) -> Any:
    return page.locator("figure:has(script.axes)").first


def _hover(page: Page) -> dict[str, Any]:
    """Point at the middle of the first figure's first curve; return what is read there."""
    figure = _first(page)
    axes = json.loads(figure.locator("script.axes").text_content())[0]
    rows = [line.split(",") for line in _data_of(figure).splitlines()[1:]]
    points = [(float(row[0]), float(row[1])) for row in rows if row[0]]
    inside = [
        p for p in points if all(0 <= _share(v, axes[a]) <= 1 for v, a in zip(p, "xy", strict=True))
    ]
    x, y = inside[len(inside) // 2]
    left, top, width, height = axes["box"]
    at_x = left + _share(x, axes["x"]) * width
    at_y = top + (1 - _share(y, axes["y"])) * height
    plot = figure.locator(".plot")
    plot.scroll_into_view_if_needed()
    box = plot.bounding_box()
    page.mouse.move(box["x"] + at_x * box["width"], box["y"] + at_y * box["height"])
    reading = figure.locator(".reading").inner_text()
    page.mouse.move(0, 0)
    return {
        "x": x,
        "y": y,
        "titles": [axes["x"][0], axes["y"][0]],
        "reading": reading,
        "after": figure.locator(".reading").inner_text(),
    }


def _share(value: float, axis: list[Any]) -> float:
    """Return where a value lies along an axis, 0 to 1."""
    _, low, high, scale = axis
    if scale == "log":
        value, low, high = (math.log10(max(v, 1e-300)) for v in (value, low, high))
    return float((value - low) / (high - low))


def _data_of(figure: Any) -> str:
    text: str = figure.locator("a.data").evaluate(
        "(a) => decodeURIComponent(a.href.slice(a.href.indexOf(',') + 1))"
    )
    return text


def _keys(page: Page) -> dict[str, Any]:
    """Go by keyboard alone: the first stop of the page, then along a curve and away."""
    page.keyboard.press("Tab")
    first = page.evaluate("() => document.activeElement.textContent")
    page.keyboard.press("Enter")
    landed = page.evaluate("() => document.activeElement.id || document.activeElement.tagName")
    figure = _first(page)
    figure.locator(".plot").focus()
    readings = []
    for key in ("ArrowRight", "ArrowRight", "ArrowLeft", "Escape"):
        page.keyboard.press(key)
        readings.append(figure.locator(".reading").inner_text())
    ring = figure.locator(".plot").evaluate("(plot) => getComputedStyle(plot).outlineStyle")
    return {"first stop": first, "skips to": landed, "readings": readings, "ring": ring}


def _download(page: Page, folder: Path) -> dict[str, str]:
    with page.expect_download() as waiting:
        _first(page).locator("a.data").click()
    place = folder / "figure.csv"
    waiting.value.save_as(place)
    return {"name": waiting.value.suggested_filename, "text": place.read_text("utf-8")}


def _widths(page: Page) -> dict[str, int]:
    """Return by how much the page is wider than the window, for windows of any width."""
    found = {}
    for width in WIDTHS:
        page.set_viewport_size({"width": width, "height": 900})
        found[str(width)] = page.evaluate(
            "() => document.documentElement.scrollWidth - document.documentElement.clientWidth"
        )
    page.set_viewport_size({"width": 1280, "height": 900})
    return found


def _print(page: Page, folder: Path) -> dict[str, Any]:
    """Print the page to A4; return each printed page's text and the figures' heights."""
    place = folder / "printed.pdf"
    page.set_viewport_size({"width": 670, "height": 900})  # about what A4 leaves between margins
    page.emulate_media(media="print")
    figures = page.evaluate(FIGURES)
    page.pdf(path=place, format="A4", prefer_css_page_size=True)
    page.emulate_media(media="screen")
    done = subprocess.run(["pdftotext", "-layout", place, "-"], capture_output=True, check=True)
    return {"pages": done.stdout.decode().split("\f")[:-1], "figures": figures}


def _scripts_off(browser: Browser, report: Path) -> dict[str, Any]:
    context = browser.new_context(
        viewport={"width": 1280, "height": 900}, java_script_enabled=False, offline=True
    )
    page = context.new_page()
    page.goto(report.as_uri())
    found = {
        "text": page.inner_text("main"),
        "drawings": page.locator("figure svg.drawing").count(),
        "data": page.locator("figure a.data").count(),
    }
    context.close()
    return found
