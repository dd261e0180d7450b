/** The strip under the drop zone: what is being sent, and the logs that are worked on. */

import { announce, button, byId, el, fill } from "./dom.js";
import { logStateNode } from "./log_state.js";
import { bytes } from "./number.js";
import { problemBox } from "./problem.js";
import { on, state } from "./state.js";
import { logState } from "./words.js";

/** Entries of logs by id. */
const entries = new Map();

export function start() {
  on("log", follow);
  on("logs", () => state.logs.filter(isOpen).forEach(follow));
  on("plant", () => {
    entries.forEach((entry) => entry.node.remove());
    entries.clear();
  });
}

function isOpen(log) {
  return log.state === "waiting" || log.state === "working";
}

/** A log that nobody follows yet is taken up while it is worked on. */
function follow(log) {
  const entry = entries.get(log.id);
  if (!entry && !isOpen(log)) return;
  const state = entry?.state;
  (entry || addLog(log, "")).update(log);
  if (state && state !== log.state) announce(`${log.name}: ${logState(log)}`);
}

/**
 * Takes up a log.
 * @param {string} note what is to be said before how it stands
 */
export function addLog(log, note) {
  entries.get(log.id)?.node.remove();
  const shown = logStateNode(log);
  const node = entryNode(log.name, () => entries.delete(log.id), note && el("span", {}, note), shown.node);
  const entry = {
    node,
    state: log.state,
    update: (log) => {
      entry.state = log.state;
      shown.update(log);
    },
  };
  entries.set(log.id, entry);
  byId("progress").prepend(node);
  return entry;
}

/** One line of the strip; it goes when its user has read it. */
function entryNode(name, onGone, ...content) {
  const node = el("div", { class: "entry" }, el("strong", { class: "name" }, name), content,
    button("×", () => {
      node.remove();
      onGone();
    }, { class: "close", "aria-label": `Hide ${name}` }));
  return node;
}

/** An upload under way, until it becomes a log or a problem. */
export function addUpload(file, onStop) {
  const bar = el("progress", { "aria-label": `Upload of ${file.name}`, max: 1, value: 0 });
  const words = el("span", { class: "state" }, "waiting to be sent");
  const line = el("div", { class: "log-line" }, words, bar,
    button("Stop", onStop, { "aria-label": `Stop the upload of ${file.name}` }));
  const content = el("div", { class: "log-state" }, line);
  const node = entryNode(file.name, onStop, content);
  byId("progress").prepend(node);
  return {
    progress(share) {
      bar.value = share;
      words.textContent = `sending ${bytes(share * file.size)} of ${bytes(file.size)}`;
    },
    fail(problem, again) {
      fill(content, problemBox(problem, () => {
        node.remove();
        again();
      }));
    },
    done: () => node.remove(),
  };
}
