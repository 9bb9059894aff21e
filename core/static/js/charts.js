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
    const ofAllLevels = meta.kind === "ring" || meta.kind === "levelline";
    if (!ofAllLevels && meta.level && meta.level !== state.level) return false;
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
    if (meta.kind === "levelline") {
      changed.line = { ...trace.line, width: meta.level === state.level ? 2.6 : 1.1 };
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
    if (!figure || !plots[name]) return;
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

  function under(address, state) {
    const [path, query] = address.split("?");
    const asked = new URLSearchParams(query);
    asked.set("level", state.level);
    asked.set("curve", state.curve);
    return `${path}?${asked}`;
  }

  function follow(state) {
    for (const link of result.querySelectorAll("a[data-file]")) {
      const address = link.getAttribute("href");
      if (!address.startsWith("data:")) link.href = under(address, state);
    }
    // The still drawings, for print, once the reader has come to rest.
    clearTimeout(soon);
    soon = setTimeout(() => {
      for (const still of result.querySelectorAll("img.drawn")) {
        const address = still.getAttribute("src");
        const changes = !unchanging.has(still.closest("[data-chart]").dataset.chart);
        if (changes && !address.startsWith("data:")) still.src = under(address, state);
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

  // The charts of features are many: each is drawn once it comes near, and fetched then where the page left them out.
  function drawFeaturesWhenNear() {
    const section = result.querySelector("[data-features]");
    const inPage = document.getElementById("feature-plots");
    if (!section || !inPage) return;
    let arriving = null;
    const arrived = () => {
      arriving ??= section.dataset.plots
        ? fetch(section.dataset.plots).then((answer) => (answer.ok ? answer.json() : {}))
        : Promise.resolve(JSON.parse(inPage.textContent));
      return arriving;
    };
    const near = new IntersectionObserver((seen) => {
      for (const { isIntersecting, target } of seen) {
        if (!isIntersecting) continue;
        near.unobserve(target);
        const name = target.dataset.chart;
        arrived().then((found) => {
          if (!found[name]) return;
          plots[name] = found[name];
          draw(name, chosen());
        });
      }
    }, { rootMargin: "400px" });
    for (const figure of section.querySelectorAll("[data-chart]")) near.observe(figure);
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
  drawFeaturesWhenNear();

  // On paper nothing is folded away.
  const folded = () => result.querySelectorAll("details.dips:not([open])");
  let unfolded = [];
  window.addEventListener("beforeprint", () => {
    unfolded = [...folded()];
    for (const part of unfolded) part.open = true;
  });
  window.addEventListener("afterprint", () => {
    for (const part of unfolded) part.open = false;
  });
})();
