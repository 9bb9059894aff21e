// Sets windows for features by dragging over the data; typing them does the same.
"use strict";

(() => {
  const button = document.querySelector("[data-pick]");
  const field = document.querySelector("textarea[data-windows]");
  const source = document.getElementById("plots");
  if (!button || !field || !source || !window.Plotly) return;

  const picker = document.getElementById("window-picker");
  const target = picker.querySelector(".plot");
  const curves = JSON.parse(source.textContent).curves;
  let isDrawn = false;

  // The lines of the list that are windows.
  const listed = () => field.value.split("\n")
    .map((line) => line.trim().split(/\s*(?:\bto\b|[:;,–]|\s)\s*/).map(Number))
    .filter((ends) => ends.length === 2 && ends.every(Number.isFinite));

  const shaded = () => listed().map(([low, high]) => ({
    type: "rect", xref: "x", yref: "paper", x0: low, x1: high, y0: 0, y1: 1,
    fillcolor: "rgba(11,85,99,0.12)", line: { width: 0 }, layer: "below",
  }));

  function draw() {
    // Data and fit of the curve chart, without curves and residuals.
    const traces = curves.data.filter((trace) => trace.yaxis === "y" && ["data", "fit"].includes(trace.name));
    const { xaxis, yaxis, font } = curves.layout;
    const layout = {
      font, height: 300, autosize: true, dragmode: "select", selectdirection: "h",
      margin: { l: 56, r: 8, t: 8, b: 48 }, shapes: shaded(), hovermode: false,
      paper_bgcolor: "rgba(0,0,0,0)", plot_bgcolor: "rgba(0,0,0,0)",
      xaxis: { ...xaxis, anchor: "y", fixedrange: true },
      yaxis: { ...yaxis, domain: [0, 1], fixedrange: true },
    };
    const data = traces.map((trace) => ({ ...trace, visible: true, selected: {}, unselected: { marker: { opacity: 1 } } }));
    window.Plotly.react(target, data, layout, { responsive: true, displayModeBar: false });
    if (isDrawn) return;
    isDrawn = true;
    target.on("plotly_selected", (picked) => {
      if (!picked || !picked.range) return;
      add(picked.range.x);
    });
  }

  // To three digits of the window's own width: a hand is no finer.
  function add(range) {
    const [low, high] = range.map(Number).sort((a, b) => a - b);
    if (!(high > low)) return;
    const places = Math.min(12, Math.max(0, 2 - Math.floor(Math.log10(high - low))));
    const [first, last] = [Number(field.dataset.low), Number(field.dataset.high)];
    const ends = [Math.max(low, first), Math.min(high, last)];
    const line = ends.map((end) => inside(end, places, first, last)).join(" to ");
    field.value = [...field.value.split("\n").map((each) => each.trim()).filter(Boolean), line].join("\n");
    window.Plotly.relayout(target, { shapes: shaded(), selections: [] });
  }

  // Rounding must not lead out of the data.
  function inside(end, places, first, last) {
    const rounded = Number(end.toFixed(places));
    return String(rounded < first || rounded > last ? end : rounded);
  }

  button.hidden = false;
  button.addEventListener("click", () => {
    const opens = picker.hidden;
    picker.hidden = !opens;
    button.setAttribute("aria-expanded", String(opens));
    if (opens) draw();
  });
  field.addEventListener("input", () => {
    if (isDrawn) window.Plotly.relayout(target, { shapes: shaded() });
  });
})();
