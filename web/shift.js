/** The shift's sheet: a log, one of its steady periods, and the balance of it. */

import * as api from "./api.js";
import { showBalance } from "./balance.js";
import { byId, el, fill } from "./dom.js";
import { attempt } from "./problem.js";
import { change, link, route, settle } from "./route.js";
import { on, state } from "./state.js";
import { stretch } from "./time.js";
import { count } from "./words.js";

const requests = new api.Latest();
/** Log whose periods the selection lists, with how its balances stood when they were asked for. */
let listed = { log: null, version: null };

export function start() {
  byId("period").addEventListener("change", (event) => change({ balance: event.target.value, log: null }));
  byId("shift-log").addEventListener("change", (event) => change({ log: event.target.value, balance: null }));
  byId("period-before").addEventListener("click", () => step(-1));
  byId("period-after").addEventListener("click", () => step(1));
  on("logs", listLogs);
  on("log", (log) => {
    listLogs();
    const concerns = listed.log === null || listed.log === log.id;
    if (log.state === "done" && concerns && !byId("view-shift").hidden) show();
  });
}

/** Shows what the address asks for. */
export function show() {
  return attempt(byId("balance"), async () => {
    listLogs();
    const signal = requests.signal();
    const { balance: id, log: wanted } = route();
    const balance = id ? await api.balance(id, signal) : null;
    const log = balance?.log || wanted || state.logs.find((log) => log.balance_count > 0)?.id;
    if (!log) {
      empty();
      return;
    }
    const summaries = await listPeriods(log, signal);
    if (balance) {
      byId("period").value = balance.id;
      steps();
      showBalance(byId("balance"), balance, state.plant.time_zone);
      return;
    }
    const last = summaries.at(-1);
    if (!last) {
      fill(byId("balance"), el("p", {}, "No period of this log is balanced."));
      return;
    }
    settle({ balance: last, log: null });
    await show();
  });
}

function empty() {
  listed = { log: null, version: null };
  fill(byId("period"));
  fill(byId("rejected"));
  steps();
  fill(byId("balance"), el("p", {}, state.logs.length
    ? "No log of this plant has a balance yet. "
    : "There is no log of this plant yet: drop the shift's log anywhere on this page. ",
  state.logs.length > 0 && el("a", { href: link("logs") }, "See the logs")));
}

function listLogs() {
  const known = state.logs.filter((log) => log.balance_count > 0 || log.state === "done");
  const select = byId("shift-log");
  const isListed = known.length === select.options.length &&
    known.every((log, place) => select.options[place].value === log.id);
  // A selection that is filled anew closes under its user's finger.
  if (!isListed) fill(select, known.map((log) => el("option", { value: log.id }, log.name)));
  if (listed.log) select.value = listed.log;
  select.disabled = known.length === 0;
}

/** Lists the periods of a log; gives the ids of its balances. */
async function listPeriods(log, signal) {
  const zone = state.plant.time_zone;
  const known = state.logs.find((known) => known.id === log);
  const version = `${log} ${known?.state} ${known?.balance_count}`;
  const select = byId("period");
  if (listed.version !== version) {
    const [periods, balances] = await Promise.all([
      api.periods(log, signal), api.balancesOf(state.plant.id, log, signal)]);
    const found = new Map(balances.map((balance) => [balance.id, balance]));
    const balanced = periods.filter((period) => period.balance !== null);
    fill(select, balanced.map((period) => el("option", { value: period.balance },
      `${stretch(period.from, period.to, zone)}${told(found.get(period.balance))}`)));
    fill(byId("rejected"), rejected(periods.filter((period) => period.rejected !== null), zone));
    listed = { log, version };
  }
  byId("shift-log").value = log;
  return [...select.options].map((option) => option.value);
}

/** What stands behind a period in the selection. */
function told(summary) {
  if (!summary) return "";
  if (!summary.converged) return ", not balanced";
  return summary.findings.length ? `, suspect: ${summary.findings.join(", ")}` : "";
}

function rejected(periods, zone) {
  if (!periods.length) return null;
  const one = (period) => el("li", {}, el("strong", {}, stretch(period.from, period.to, zone)), `: ${period.rejected}`);
  return el("details", {},
    el("summary", {}, `${count(periods.length, "stretch", "stretches")} of this log could not be balanced`),
    el("ul", {}, periods.map(one)));
}

function step(by) {
  const select = byId("period");
  const next = select.options[select.selectedIndex + by];
  if (next) change({ balance: next.value, log: null });
}

function steps() {
  const select = byId("period");
  select.disabled = select.options.length === 0;
  byId("period-before").disabled = select.selectedIndex <= 0;
  byId("period-after").disabled = select.selectedIndex < 0 || select.selectedIndex === select.options.length - 1;
}
