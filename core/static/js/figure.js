// Draws each <div class="figure" data-figure="ID"> from the JSON script with that id.
"use strict";

const FIGURE_OPTIONS = {
  responsive: true,
  displaylogo: false,
  // Named one by one: the library may come to offer buttons that send data away.
  modeBarButtons: [["zoom2d", "pan2d", "zoomIn2d", "zoomOut2d", "resetScale2d"]],
};

for (const place of document.querySelectorAll("div.figure[data-figure]")) {
  const figure = JSON.parse(document.getElementById(place.dataset.figure).textContent);
  Plotly.newPlot(place, figure.data, figure.layout, FIGURE_OPTIONS);
}
