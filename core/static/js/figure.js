// Draws each <div class="figure" data-figure="ID"> from the JSON script with that id.
"use strict";

const FIGURE_OPTIONS = {
  responsive: true,
  displaylogo: false,
  modeBarButtonsToRemove: ["select2d", "lasso2d", "autoScale2d", "toImage"],
};

for (const place of document.querySelectorAll("div.figure[data-figure]")) {
  const figure = JSON.parse(document.getElementById(place.dataset.figure).textContent);
  Plotly.newPlot(place, figure.data, figure.layout, FIGURE_OPTIONS);
}
