"use strict";
/* Reads values off drawn curves, by pointer and by arrow keys. The page is whole without it. */
(() => {
  const NS = "http://www.w3.org/2000/svg";

  /* The data link holds the only copy of the numbers: two columns a curve. */
  function columns(link) {
    const text = decodeURIComponent(link.href.slice(link.href.indexOf(",") + 1));
    const rows = [];
    let row = [], cell = "", quoted = false;
    for (let i = 0; i < text.length; i++) {
      const c = text[i];
      if (quoted) {
        if (c !== '"') cell += c;
        else if (text[i + 1] === '"') { cell += c; i++; }
        else quoted = false;
      } else if (c === '"') quoted = true;
      else if (c === "," || c === "\n") {
        row.push(cell); cell = "";
        if (c === "\n") { rows.push(row); row = []; }
      } else cell += c;
    }
    const body = rows.slice(1);
    return rows[0].map((_, n) => body.map((r) => r[n]).filter((v) => v !== "").map(Number));
  }

  const share = (value, [, low, high, scale]) => {
    const f = scale === "log" ? Math.log10 : (v) => v;
    return (f(value) - f(low)) / (f(high) - f(low));
  };

  const shown = (value) => String(Number(value.toPrecision(4))).replace("-", "\u2212");

  function prepare(figure) {
    const plot = figure.querySelector(".plot");
    const given = JSON.parse(figure.querySelector("script.axes").textContent);
    const data = columns(figure.querySelector("a.data"));
    const curves = [];
    let n = 0;
    for (const axes of given) {
      const [left, top, width, height] = axes.box;
      for (const name of axes.curves) {
        const xs = data[n++], ys = data[n++], points = [];
        xs.forEach((x, i) => {
          const sx = share(x, axes.x), sy = share(ys[i], axes.y);
          if (sx < -0.001 || sx > 1.001 || sy < -0.001 || sy > 1.001) return;
          points.push({ x, y: ys[i], px: left + sx * width, py: top + (1 - sy) * height });
        });
        points.sort((a, b) => a.px - b.px);
        if (points.length) curves.push({ name, axes, points });
      }
    }
    if (!curves.length) return;

    const over = document.createElementNS(NS, "svg");
    over.setAttribute("class", "reader");
    over.setAttribute("aria-hidden", "true");
    const line = document.createElementNS(NS, "line");
    const dot = document.createElementNS(NS, "circle");
    dot.setAttribute("r", "4");
    over.append(line, dot);
    over.style.display = "none";
    plot.append(over);

    const reading = document.createElement("p");
    reading.className = "reading";
    reading.setAttribute("role", "status");
    plot.parentElement.after(reading);
    plot.tabIndex = 0;
    plot.setAttribute("role", "group");
    plot.setAttribute("aria-label", "Curves: read values with the arrow keys");

    let curve = 0, point = -1;
    function show() {
      const c = curves[curve], p = c.points[point], box = plot.getBoundingClientRect();
      const [, top, , height] = c.axes.box;
      const x = p.px * box.width;
      line.setAttribute("x1", x); line.setAttribute("x2", x);
      line.setAttribute("y1", top * box.height); line.setAttribute("y2", (top + height) * box.height);
      dot.setAttribute("cx", x); dot.setAttribute("cy", p.py * box.height);
      over.style.display = "";
      reading.textContent = `${c.name}: ${c.axes.x[0]} ${shown(p.x)}, ${c.axes.y[0]} ${shown(p.y)}`;
    }
    const hide = () => { over.style.display = "none"; reading.textContent = ""; };

    plot.addEventListener("pointermove", (event) => {
      const box = plot.getBoundingClientRect();
      const x = event.clientX - box.left, y = event.clientY - box.top;
      let best = Infinity;
      curves.forEach((c, i) => {
        const [left, top, width, height] = c.axes.box;
        const inside = x >= left * box.width && x <= (left + width) * box.width
          && y >= top * box.height && y <= (top + height) * box.height;
        if (!inside) return;
        c.points.forEach((p, j) => {
          const d = Math.hypot(p.px * box.width - x, p.py * box.height - y);
          if (d < best) { best = d; curve = i; point = j; }
        });
      });
      if (best < Infinity) show(); else hide();
    });
    plot.addEventListener("pointerleave", hide);
    plot.addEventListener("blur", hide);
    plot.addEventListener("keydown", (event) => {
      const c = curves[curve], step = event.shiftKey ? 10 : 1;
      if (event.key === "ArrowRight") point = Math.min(point + step, c.points.length - 1);
      else if (event.key === "ArrowLeft") point = Math.max(point - step, 0);
      else if (event.key === "ArrowUp" || event.key === "ArrowDown") {
        curve = (curve + (event.key === "ArrowUp" ? 1 : curves.length - 1)) % curves.length;
        const px = point < 0 ? 0 : c.points[point].px;
        const near = curves[curve].points.map((p) => Math.abs(p.px - px));
        point = near.indexOf(Math.min(...near));
      } else if (event.key === "Escape") { hide(); return; }
      else return;
      point = Math.max(point, 0);
      event.preventDefault();
      show();
    });
  }

  for (const figure of document.querySelectorAll("figure")) {
    if (figure.querySelector("script.axes")) prepare(figure);
  }

  /* A box that scrolls must be reachable by keyboard; one that does not must not be a stop. */
  const scrolling = () => {
    for (const box of document.querySelectorAll(".scroll")) {
      if (box.scrollWidth > box.clientWidth + 1) {
        box.tabIndex = 0;
        box.setAttribute("role", "group");
        const name = box.querySelector("caption");
        box.setAttribute("aria-label", name ? name.textContent : "Wide content, scrolls sideways");
      } else for (const a of ["tabindex", "role", "aria-label"]) box.removeAttribute(a);
    }
  };
  scrolling();
  addEventListener("resize", scrolling);

  if (matchMedia("(max-width: 76rem)").matches) {
    const contents = document.querySelector(".contents details");
    if (contents) contents.open = false;
  }
})();
