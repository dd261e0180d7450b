/** A trend as a plot: value with its band, readings, and the breaks through which no line is drawn. */

import uPlot from "./vendor/uplot/uPlot.esm.js";
import { el } from "./dom.js";
import { written } from "./number.js";
import { day, stamp } from "./time.js";

const HEIGHT = 380;
const DAY = 86400000;
/** Numbers of breaks nearer than this would run into one another, CSS pixels. */
const APART = 18;

/**
 * @param {HTMLElement} place
 * @param {{columns: Array[], breaks: Object[], unit: string, hasReadings: boolean, zone: string}} data
 * @param {{onRow: (row: number|null) => void, onZoom: (from: number, to: number) => void}} heard
 * @returns {{showRow: (row: number) => void, destroy: () => void}}
 */
export function plot(place, data, heard) {
  const frame = el("div", { class: "plot" });
  place.append(frame);
  let chart = null;
  const draw = () => {
    chart?.destroy();
    chart = new uPlot(options(data, heard, frame.clientWidth), data.columns, frame);
  };
  draw();
  const sizes = new ResizeObserver(() => {
    if (frame.clientWidth > 0 && frame.clientWidth !== chart.width) {
      chart.setSize({ width: frame.clientWidth, height: HEIGHT });
    }
  });
  sizes.observe(frame);
  // Colours are read when it is drawn.
  const scheme = matchMedia("(prefers-color-scheme: dark)");
  scheme.addEventListener("change", draw);
  return {
    showRow(row) {
      const left = chart.valToPos(data.columns[0][row], "x");
      const value = data.columns[3][row];
      chart.setCursor({ left, top: value === null ? 0 : chart.valToPos(value, "y") });
    },
    destroy() {
      sizes.disconnect();
      scheme.removeEventListener("change", draw);
      chart.destroy();
      frame.remove();
    },
  };
}

function options({ breaks, unit, hasReadings, zone }, { onRow, onZoom }, width) {
  const style = getComputedStyle(document.documentElement);
  const colour = (name) => style.getPropertyValue(`--${name}`).trim();
  const font = `12px ${style.fontFamily}`;
  const rule = { stroke: colour("rule"), width: 1 };
  const axis = { stroke: colour("muted"), font, grid: rule, ticks: rule };
  const edge = { scale: "y", stroke: "transparent", width: 0, points: { show: false } };
  const reading = { stroke: colour("reading"), width: 0, paths: () => null, show: hasReadings,
    points: { show: true, size: 5, stroke: colour("reading"), fill: colour("paper") } };
  return {
    width,
    height: HEIGHT,
    ms: 1,
    tzDate: (time) => uPlot.tzDate(new Date(time), zone),
    legend: { show: false },
    scales: { x: { time: true }, y: { auto: true } },
    series: [{}, edge, edge,
      { stroke: colour("line"), width: 2, points: { size: 4, stroke: colour("line"), fill: colour("line"),
        // Where points are too dense to be drawn, those without a line still are.
        filter: (chart, series, isShown) => (isShown ? null : loneRows(chart.data[series])) } },
      reading],
    bands: [{ series: [2, 1], fill: colour("band") }],
    axes: [
      { ...axis, space: 80, values: (chart, times, place, space, step) => timeLabels(times, step, zone) },
      { ...axis, size: 76, label: unit, labelFont: font, labelSize: 20,
        values: (chart, values, place, space, step) => numberLabels(values, step) },
    ],
    cursor: { drag: { x: true, y: false, setScale: false }, y: false, points: { size: 9 } },
    hooks: {
      setCursor: [(chart) => onRow(chart.cursor.left < 0 ? null : chart.cursor.idx)],
      setSelect: [(chart) => {
        const { left, width } = chart.select;
        if (width > 0) onZoom(chart.posToVal(left, "x"), chart.posToVal(left + width, "x"));
      }],
      draw: [(chart) => {
        drawLoneBands(chart, colour("line"));
        drawBreaks(chart, breaks, colour("break"), style.fontFamily);
      }],
    },
  };
}

/** Dates, and the time of day where the marks are closer than a day. The year stands where it is first needed. */
function timeLabels(times, step, zone) {
  let told = "";
  return times.map((time) => {
    const date = day(time, zone);
    const year = date.slice(0, 4) === told.slice(0, 4) ? "" : `${date.slice(0, 4)}-`;
    const clock = step < DAY ? stamp(time, zone).slice(11, 16) : "";
    const label = date === told ? clock : [clock, `${year}${date.slice(5)}`].filter(Boolean).join("\n");
    told = date;
    return label;
  });
}

/** Numbers with as many decimals as their steps need. */
function numberLabels(values, step) {
  const places = (String(Number(step.toPrecision(6))).split(".")[1] || "").length;
  return values.map((value) => written(value, places));
}

/** Rows of a column that have no neighbour. */
function loneRows(column) {
  const isKnown = (row) => column[row] !== null && column[row] !== undefined;
  return [...column.keys()].filter((row) => isKnown(row) && !isKnown(row - 1) && !isKnown(row + 1));
}

/** A point between two breaks has no neighbour to draw a band to: a bar shows its band. */
function drawLoneBands(chart, colour) {
  const { ctx, bbox, data: [times, lows, highs] } = chart;
  ctx.save();
  ctx.beginPath();
  ctx.rect(bbox.left, bbox.top, bbox.width, bbox.height);
  ctx.clip();
  ctx.strokeStyle = colour;
  ctx.lineWidth = devicePixelRatio;
  ctx.beginPath();
  for (const row of loneRows(lows)) {
    const x = chart.valToPos(times[row], "x", true);
    ctx.moveTo(x, chart.valToPos(lows[row], "y", true));
    ctx.lineTo(x, chart.valToPos(highs[row], "y", true));
  }
  ctx.stroke();
  ctx.restore();
}

/** A dashed line at each break, with the number under which the list beneath explains it. */
function drawBreaks(chart, breaks, colour, family) {
  const { ctx, bbox } = chart;
  const ratio = devicePixelRatio;
  let last = -Infinity;
  ctx.save();
  ctx.strokeStyle = ctx.fillStyle = colour;
  ctx.lineWidth = ratio;
  ctx.font = `${11 * ratio}px ${family}`;
  ctx.textAlign = "center";
  ctx.textBaseline = "bottom";
  ctx.setLineDash([4 * ratio, 4 * ratio]);
  for (const { time, number } of breaks) {
    const x = chart.valToPos(time, "x", true);
    if (x < bbox.left || x > bbox.left + bbox.width) continue;
    ctx.beginPath();
    ctx.moveTo(x, bbox.top);
    ctx.lineTo(x, bbox.top + bbox.height);
    ctx.stroke();
    if (x - last < APART * ratio) continue;
    ctx.fillText(String(number), x, bbox.top - 2 * ratio);
    last = x;
  }
  ctx.restore();
}
