/** How one log stands and what can be done about it: the same wherever a log is shown. */

import * as api from "./api.js";
import { button, el, fill } from "./dom.js";
import { attempt, faultList } from "./problem.js";
import { link } from "./route.js";
import { noteLog } from "./state.js";
import { logState } from "./words.js";

/** What to do about a log that failed. */
const REMEDY = "Mend the file and drop it again. If it is the plant file that is wrong, add a revision of it under " +
  "Plant and begin again here.";

/**
 * The state of a log as a node that is kept up to date in place, lest a button vanish under a finger.
 * @param {Object} log
 * @returns {{node: HTMLElement, update: (log: Object) => void}}
 */
export function logStateNode(log) {
  const words = el("span", { class: "state" });
  const bar = el("progress", { "aria-label": `Work on ${log.name}`, max: 1 });
  const actions = el("span", { class: "actions" });
  const more = el("div", { class: "more" });
  const trouble = el("div");
  let state = null;

  function update(log) {
    words.textContent = logState(log);
    bar.hidden = log.state !== "waiting" && log.state !== "working";
    if (log.phase === "balancing" && log.period_count) bar.value = log.balance_count / log.period_count;
    else bar.removeAttribute("value");
    if (log.state === state) return;
    state = log.state;
    fill(actions, actionsOf(log, trouble));
    fill(more, details(log));
    fill(trouble);
  }

  update(log);
  const line = el("div", { class: "log-line" }, words, bar, actions);
  return { node: el("div", { class: "log-state" }, line, more, trouble), update };
}

function actionsOf(log, trouble) {
  const does = (work, doing) => async (event) => {
    const pressed = event.currentTarget;
    const words = pressed.textContent;
    // What is being balanced is finished first, so that cancelling takes a while.
    pressed.disabled = true;
    pressed.textContent = doing;
    await attempt(trouble, async () => noteLog(await work(log.id)), () => {
      pressed.disabled = false;
      pressed.textContent = words;
    });
  };
  const show = log.balance_count > 0 && el("a", { href: link("shift", { log: log.id }) }, "Show the balances");
  switch (log.state) {
    case "waiting":
    case "working":
      return button("Cancel", does(api.cancelLog, "Cancelling …"), { "aria-label": `Cancel the work on ${log.name}` });
    case "failed":
    case "cancelled":
      return [
        button("Begin again", does(api.restartLog, "Beginning …"), { "aria-label": `Begin again with ${log.name}` }),
        show];
    default: return show;
  }
}

function details(log) {
  return [
    log.reason && el("p", { class: log.state === "failed" ? "bad" : null }, log.reason),
    log.faults.length > 0 && faultList(log.faults),
    log.state === "failed" && el("p", {}, REMEDY),
    log.notes.length > 0 && el("ul", {}, log.notes.map((note) => el("li", {}, note))),
  ];
}
