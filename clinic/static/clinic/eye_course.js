/* Draws the chart of the eye course from the figure embedded in the page.
   The settings stand here and nowhere else: no share button, no logo, no address of a server. */
"use strict";

(function () {
  const SETTINGS = Object.freeze({
    displaylogo: false,
    showSendToCloud: false,
    plotlyServerURL: "",
    responsive: true,
    scrollZoom: false,
    doubleClick: "reset",
    modeBarButtons: [["zoom2d", "pan2d", "zoomIn2d", "zoomOut2d", "resetScale2d"]],
  });
  const NARROW = 640;

  function fitted(layout, data, width) {
    if (width >= NARROW) {
      layout.dragmode = "zoom";
      return layout;
    }
    layout.margin.l = 48;
    layout.margin.r = 6;
    layout.font.size = 11;
    layout.xaxis.tickvals = layout.xaxis.tickvals.filter((_, n) => n % 2 === 0);
    layout.xaxis.ticktext = layout.xaxis.ticktext.filter((_, n) => n % 2 === 0);
    lanesInside(layout, data);
    return layout;
  }

  /* On a narrow screen the words of a row stand above its marks instead of on the left. */
  function lanesInside(layout, data) {
    const lanes = layout.meta.lanes;
    const axis = layout[lanes.replace("y", "yaxis")];
    axis.ticktext.forEach(function (text, row) {
      layout.annotations.push({
        text: text,
        xref: "paper",
        x: 0.01,
        xanchor: "left",
        yref: lanes,
        y: row + 0.04,
        yanchor: "bottom",
        showarrow: false,
      });
    });
    axis.showticklabels = false;
    data.forEach(function (trace) {
      if (trace.yaxis === lanes) {
        trace.y = trace.y.map((row) => row + 0.24);
      }
    });
  }

  /* Ready ticks fit the whole course; once somebody zooms, the chart makes its own (with year). */
  function followZoom(holder, ticks) {
    holder.on("plotly_relayout", function (change) {
      if ("xaxis.range[0]" in change) {
        window.Plotly.relayout(holder, { "xaxis.tickmode": "auto", "xaxis.nticks": 7 });
      } else if ("xaxis.autorange" in change || "xaxis.range" in change) {
        window.Plotly.relayout(holder, {
          "xaxis.tickmode": "array",
          "xaxis.tickvals": ticks.vals,
          "xaxis.ticktext": ticks.text,
        });
      }
    });
  }

  function draw() {
    const holder = document.getElementById("eye-chart");
    const source = document.getElementById("eye-figure");
    if (!holder || !source || !window.Plotly) {
      return;
    }
    const figure = JSON.parse(source.textContent);
    const layout = fitted(figure.layout, figure.data, holder.clientWidth);
    layout.font.family = window.getComputedStyle(holder).fontFamily;
    const ticks = { vals: layout.xaxis.tickvals, text: layout.xaxis.ticktext };
    window.Plotly.newPlot(holder, figure.data, layout, SETTINGS).then(function () {
      holder.dataset.drawn = "yes";
      followZoom(holder, ticks);
    });
  }

  /* The date of "look again" is asked only when that answer is chosen. */
  function answers() {
    document.querySelectorAll("form.answer").forEach(function (form) {
      const date = form.querySelector("[name=look_again_on]");
      if (!date) {
        return;
      }
      form.addEventListener("change", function () {
        const chosen = form.querySelector("[name=answer]:checked");
        date.required = Boolean(chosen && chosen.value === "look_again");
      });
    });
  }

  draw();
  answers();
})();
