/** The trend view: which series, over which stretch of time, as a plot, in words and as a table. */

import * as api from "./api.js";
import { button, byId, el, fill } from "./dom.js";
import { attempt } from "./problem.js";
import { change, route, settle } from "./route.js";
import { showTrend } from "./trend_page.js";
import { on, state } from "./state.js";
import { day, instant } from "./time.js";

const DAY = 86400000;
const RANGES = [["all", "All"], ["7", "Last 7 days"], ["30", "Last 30 days"], ["90", "Last 90 days"]];
const KINDS = { indicator: "Indicators", tag: "Tags", quantity: "Quantities" };

const requests = new api.Latest();
/** What trends there are, and of which plant and how many balances. */
let known = { version: null, series: [] };

export function start() {
  byId("series-filter").addEventListener("input", listSeries);
  byId("series").addEventListener("change", (event) => change({ series: event.target.value }));
  fill(byId("range-buttons"), RANGES.map(([range, name]) =>
    button(name, () => change({ range, from: null, to: null }), { "data-range": range })));
  byId("range").addEventListener("submit", (event) => {
    event.preventDefault();
    const zone = state.plant.time_zone;
    const [from, to] = [byId("range-from").value, byId("range-to").value];
    // The last day is meant to be shown too: it ends where the next begins.
    const end = to && day(Date.parse(`${to}T12:00Z`) + DAY, "UTC");
    change({ range: null, from: from && instant(from, zone), to: end && instant(end, zone) });
  });
  // A new log lengthens every trend.
  on("plants", () => state.plant && !byId("view-trend").hidden && show());
}

export function show() {
  return attempt(byId("trend"), async () => {
    const { plant } = state;
    const version = `${plant.id} ${plant.balance_count}`;
    if (known.version !== version) {
      known = { version, series: await api.series(plant.id) };
      listSeries();
    }
    if (!known.series.length) {
      fill(byId("trend-title"), "No trend yet");
      fill(byId("slope"));
      fill(byId("trend"), el("p", {}, "A trend is made of the balances of logs. Drop one on this page."));
      fill(byId("trend-notes"));
      return;
    }
    if (!route().series) settle({ series: known.series[0].series });
    const { series } = route();
    byId("series").value = series;
    const { from, to } = stretchOf(route(), plant);
    showRange(from, to);
    const trend = await api.trend(plant.id, series, from, to, requests.signal());
    const description = known.series.find((one) => one.series === series)?.description;
    showTrend(trend, description, plant.time_zone, {
      onZoom: (from, to) => change({ range: null, from: new Date(from).toISOString(), to: new Date(to).toISOString() }),
    });
  });
}

/** The stretch of time that an address asks for. "The last days" count from the last balance: history may end early. */
function stretchOf({ range, from, to }, plant) {
  if (from || to) return { from, to };
  if (!(Number(range) > 0) || plant.last_balance === null) return {};
  return { from: new Date(Date.parse(plant.last_balance) - Number(range) * DAY).toISOString() };
}

function showRange(from, to) {
  const zone = state.plant.time_zone;
  const { range, from: ownFrom, to: ownTo } = route();
  const pressed = ownFrom || ownTo ? null : range || "all";
  for (const one of byId("range-buttons").children) one.setAttribute("aria-pressed", String(one.dataset.range === pressed));
  byId("range-from").value = from ? day(from, zone) : "";
  byId("range-to").value = to ? day(Date.parse(to) - 1, zone) : "";
}

/** Lists the series that the filter lets through, indicators first. */
function listSeries() {
  const wanted = byId("series-filter").value.trim().toLowerCase();
  const found = known.series.filter((one) => `${one.series} ${one.description}`.toLowerCase().includes(wanted));
  const option = (one) => el("option", { value: one.series },
    `${one.series}${one.description && `, ${one.description}`} [${one.unit}]`);
  fill(byId("series"), Object.entries(KINDS).map(([kind, label]) => {
    const members = found.filter((one) => one.kind === kind);
    return members.length > 0 && el("optgroup", { label: `${label} (${members.length})` }, members.map(option));
  }));
  byId("series").value = route().series;
  byId("series-count").textContent = wanted ? `${found.length} of ${known.series.length}` : `${known.series.length} series`;
}
