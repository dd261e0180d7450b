/** One trend on the page: its plot and everything the plot says, also in words and as a table. */

import { byId, el, fill } from "./dom.js";
import { differenceUnit, shown, twoDigits } from "./number.js";
import { dataTable, measure, none, repeatCell } from "./table.js";
import { stamp, stretch } from "./time.js";
import { plotData, pointWords, slopeWords, summaryWords } from "./trend_data.js";
import { plot } from "./trend_plot.js";
import { count } from "./words.js";

/** So many rows of the table are made: more would take seconds. */
const MOST_ROWS = 1000;

/** More breaks than these are listed when asked for. */
const FEW_BREAKS = 12;

/** The plot that is on the page. */
let shownPlot = null;

/**
 * @param {Object} trend as the service tells it
 * @param {string|undefined} description
 * @param {string} zone
 * @param {{onZoom: (from: number, to: number) => void}} heard
 */
export function showTrend(trend, description, zone, { onZoom }) {
  shownPlot?.destroy();
  shownPlot = null;
  const { columns, points, breaks } = plotData(trend);
  fill(byId("trend-title"), trend.series, description && el("span", { class: "description" }, description));
  fill(byId("slope"), slopeWords(trend));
  if (!points.length) {
    fill(byId("trend"), el("p", {}, "There is no balance in this stretch of time. Choose a longer one."));
    fill(byId("trend-notes"));
    return;
  }
  const breakWords = (time) => {
    const found = breaks.find((change) => change.time === time);
    return found ? `Break ${found.number}: ${found.causes.join("; ")}` : "No balance for a long while";
  };
  const words = (row) => (points[row] === null ? breakWords(columns[0][row]) : pointWords(trend, points[row], zone));
  const readout = el("p", { class: "readout" });
  const hint = "Point at the plot, or move the slider, to read out a value. Drag across the plot to look closer.";
  const read = (row) => {
    readout.textContent = row === null || row === undefined ? hint : words(row);
  };
  read(null);
  const slider = el("input", {
    type: "range", min: 0, max: points.length - 1, value: points.length - 1, class: "cursor",
    "aria-label": "Point of the plot to read out", "aria-valuetext": words(points.length - 1),
    oninput: () => {
      const row = Number(slider.value);
      shownPlot.showRow(row);
      read(row);
      slider.setAttribute("aria-valuetext", words(row));
    },
  });
  const box = el("div", { role: "img", "aria-label": `Plot of ${trend.series}. ${summaryWords(trend, zone)}` });
  fill(byId("trend"), legend(trend), box, slider, readout);
  const data = { columns, breaks, unit: trend.unit, hasReadings: Boolean(trend.measured), zone };
  shownPlot = plot(box, data, { onRow: read, onZoom });
  fill(byId("trend-notes"), breakList(breaks, zone), el("h3", {}, "In figures"),
    el("p", { id: "trend-summary" }, summaryWords(trend, zone)), table(trend, zone));
}

function legend(trend) {
  const isKnown = trend.repeat_sigma.some((sigma) => sigma !== null);
  const entry = (mark, text) => el("li", {}, el("span", { class: `mark ${mark}`, "aria-hidden": "true" }), text);
  return el("ul", { class: "legend" },
    entry("line", `balanced value, ${trend.unit}`),
    isKnown
      ? entry("band", "value ± 1.96 of the uncertainty that is drawn anew each period (95 %)")
      : entry("band", "no band: the repeatability isn't known"),
    trend.measured && entry("reading", "as read"),
    trend.breaks.length > 0 && entry("break", "break: what stands behind the values changes"));
}

function breakList(breaks, zone) {
  if (!breaks.length) return null;
  return el("div", {},
    el("h3", {}, "Breaks"),
    el("p", { class: "hint" }, "No line is drawn through a break: values on its two sides rest on different things."),
    el("details", { open: breaks.length <= FEW_BREAKS },
      el("summary", {}, count(breaks.length, "break")),
      el("ol", {}, breaks.map((change) =>
        el("li", {}, `from ${stamp(change.at, zone)}: ${change.causes.join("; ")}`)))));
}

/** The plotted data as a table, made when it is opened. */
function table(trend, zone) {
  const details = el("details", { id: "trend-table" }, el("summary", {}, "The plotted data as a table"));
  details.addEventListener("toggle", () => details.append(tableOf(trend, zone)), { once: true });
  return details;
}

function tableOf(trend, zone) {
  const uncertainty = (index) => (trend.sigma[index] > 0
    ? measure(`± ${twoDigits(trend.sigma[index])}`, differenceUnit(trend.unit)) : none(""));
  const column = (of) => ({
    isNumber: true,
    cell: (index) => (of[index] === null
      ? none("can't be known") : measure(shown(of[index], trend.sigma[index]), trend.unit)),
    sort: (index) => of[index],
  });
  const rows = trend.from.map((_, index) => index).slice(-MOST_ROWS);
  const told = rows.length < trend.from.length && el("p", { class: "hint" },
    `The last ${MOST_ROWS} of ${trend.from.length} values. Choose a shorter stretch of time to see others.`);
  const { node } = dataTable({
    label: `Values of ${trend.series}`,
    noun: "value",
    rows,
    key: String,
    columns: [
      { heading: "Period", cell: (index) => stretch(trend.from[index], trend.to[index], zone),
        sort: (index) => trend.from[index] },
      { heading: "Value", ...column(trend.value) },
      { heading: "u", hint: "Standard uncertainty", isNumber: true, cell: uncertainty, sort: (index) => trend.sigma[index] },
      { heading: "Repeatable to", isNumber: true, sort: (index) => trend.repeat_sigma[index],
        cell: (index) => repeatCell(trend.repeat_sigma[index], trend.sigma[index], trend.unit) },
      trend.measured && { heading: "Read", ...column(trend.measured) },
    ].filter(Boolean),
    sort: { column: 0, order: "ascending" },
  });
  return el("div", {}, told, node);
}
