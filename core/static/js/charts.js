// Draws the charts of a result over their still versions, and switches levels and curves.
"use strict";

(() => {
  const result = document.querySelector("[data-result]");
  const source = document.getElementById("plots");
  if (!result || !source || !window.Plotly) return;

  const plots = JSON.parse(source.textContent);
  const choices = result.querySelector("[data-choices]");
  const legend = result.querySelector("[data-legend]");
  const narrow = window.matchMedia("(max-width: 40rem)").matches;
  const ink = "#1b1f24";
  const guide = "#8a9199";

  const chosen = () => ({
    level: choices.querySelector("[name=level]:checked").value,
    curve: choices.querySelector("[name=curve]").value,
    on: new Set([...legend.querySelectorAll("input:checked")].map((box) => box.dataset.curve)),
  });

  function isShown(meta, state) {
    if (meta.kind !== "ring" && meta.level && meta.level !== state.level) return false;
    if (meta.choice === "one") return meta.curve === state.curve;
    if (meta.choice === "each") return state.on.has(meta.curve);
    return true;
  }

  // A trace as it looks under what is chosen; inside is solid with circles, outside dashed with crosses.
  function styled(trace, state) {
    const meta = trace.meta;
    const changed = { ...trace, visible: isShown(meta, state) };
    if (meta.kind === "ring") {
      const is = meta.level === state.level;
      changed.line = { ...trace.line, color: is ? ink : guide, width: is ? 2.2 : 0.8 };
    }
    if (meta.inside) {
      const inside = meta.inside[state.level];
      changed.name = `${trace.name} (${inside ? "inside" : "outside"})`;
      if (trace.marker) changed.marker = { ...trace.marker, symbol: inside ? "circle" : "x" };
      if (trace.line) changed.line = { ...trace.line, dash: inside ? "solid" : "dash" };
    }
    return changed;
  }

  function draw(name, state) {
    const figure = result.querySelector(`[data-chart="${name}"]`);
    if (!figure) return;
    const target = figure.querySelector(".plot");
    const layout = { ...plots[name].layout };
    if (narrow) {
      // A finger scrolls the page; zooming needs a pointer.
      layout.dragmode = false;
      layout.height = Math.min(layout.height, name === "ball" ? 340 : 420);
      layout.margin = { ...layout.margin, l: 44, r: 6 };
    }
    const data = plots[name].data.map((trace) => styled(trace, state));
    if (narrow) for (const trace of data) if (trace.textfont) trace.textfont = { ...trace.textfont, size: 10 };
    const config = { responsive: true, displayModeBar: false, displaylogo: false };
    target.hidden = false;
    figure.classList.add("is-drawn");
    window.Plotly.react(target, data, layout, config);
  }

  // The files beside a chart follow what is chosen, as far as a server can make them.
  const unchanging = new Set(["shrinkage", "risk", "quantiles"]);
  let soon = 0;

  function follow(state) {
    const query = `?level=${encodeURIComponent(state.level)}&curve=${encodeURIComponent(state.curve)}`;
    for (const link of result.querySelectorAll("a[data-file]")) {
      const address = link.getAttribute("href");
      if (!address.startsWith("data:")) link.href = address.split("?")[0] + query;
    }
    // The still drawings, for print, once the reader has come to rest.
    clearTimeout(soon);
    soon = setTimeout(() => {
      for (const still of result.querySelectorAll("img.drawn")) {
        const address = still.getAttribute("src");
        const changes = !unchanging.has(still.closest("[data-chart]").dataset.chart);
        if (changes && !address.startsWith("data:")) still.src = address.split("?")[0] + query;
      }
    }, 600);
  }

  function apply() {
    const state = chosen();
    for (const part of result.querySelectorAll("[data-level]")) part.hidden = part.dataset.level !== state.level;
    for (const cell of result.querySelectorAll("[data-level-cell]")) {
      cell.classList.toggle("chosen", cell.dataset.levelCell === state.level);
    }
    for (const name of result.querySelectorAll("[data-chosen-curve]")) name.textContent = state.curve;
    for (const name of Object.keys(plots)) draw(name, state);
    return state;
  }

  legend.hidden = false;
  for (const button of result.querySelectorAll("[data-without-script]")) button.hidden = true;
  for (const button of result.querySelectorAll("[data-print]")) {
    button.hidden = false;
    button.addEventListener("click", () => window.print());
  }
  choices.addEventListener("change", () => follow(apply()));
  choices.addEventListener("submit", (event) => event.preventDefault());
  legend.addEventListener("change", apply);
  apply();
})();
