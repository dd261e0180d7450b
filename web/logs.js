/** All logs of the plant and how they stand. */

import { byId, el, fill } from "./dom.js";
import { logStateNode } from "./log_state.js";
import { bytes } from "./number.js";
import { on, state } from "./state.js";
import { stamp, stretch } from "./time.js";
import { PERIODS } from "./words.js";

/** Rows by log. */
let rows = new Map();

export function start() {
  on("logs", draw);
  on("log", (log) => rows.get(log.id)?.update(log));
}

export function show() {
  draw();
}

function draw() {
  const zone = state.plant?.time_zone;
  rows = new Map(state.logs.map((log) => [log.id, row(log, zone)]));
  if (!rows.size) {
    fill(byId("logs"), el("p", {}, "There is no log yet. Drop one anywhere on this page."));
    return;
  }
  const heading = (text, isNumber) => el("th", { scope: "col", class: isNumber ? "number" : null }, text);
  fill(byId("logs"), el("div", { class: "table-box", role: "region", "aria-label": "Logs", tabindex: "0" },
    el("table", { class: "logs" },
      el("caption", { class: "unseen" }, "Logs, the newest first"),
      el("thead", {}, el("tr", {}, heading("Log"), heading("Uploaded"), heading("Covers"), heading("Size", true),
        heading("State"))),
      el("tbody", {}, [...rows.values()].map((row) => row.node)))));
}

function row(log, zone) {
  const shown = logStateNode(log);
  const covers = el("td", { "data-label": "Covers" });
  const update = (log) => {
    covers.textContent = log.from === null ? "" : stretch(log.from, log.to, zone);
    shown.update(log);
  };
  update(log);
  return {
    node: el("tr", { "data-key": log.id },
      el("th", { scope: "row" }, log.name, el("span", { class: "description" }, PERIODS[log.periods])),
      el("td", { "data-label": "Uploaded" }, stamp(log.uploaded_at, zone)), covers,
      el("td", { class: "number" }, bytes(log.size)), el("td", {}, shown.node)),
    update,
  };
}
