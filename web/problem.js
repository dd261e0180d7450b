/** Problems in words, with what to do. */

import { button, el, fill } from "./dom.js";

/** A box that says what went wrong; `again` tries it once more. */
export function problemBox(problem, again) {
  return el("div", { class: "problem", role: "alert" },
    el("p", {}, el("strong", {}, problem.title || "The page has a fault"), ": ", problem.message),
    again && button("Try again", again));
}

/**
 * Shows in `place` what `work` makes of it, or why not. What was shown stays until the new is there, so that nothing
 * jumps.
 * @param {HTMLElement} place
 * @param {() => Promise<void>} work
 * @param {() => void} [onProblem] what else is to be done about a problem
 */
export async function attempt(place, work, onProblem = () => {}) {
  try {
    await work();
  } catch (error) {
    if (error.name === "AbortError") return;
    fill(place, problemBox(error, () => attempt(place, work, onProblem)));
    onProblem();
    // What isn't the service's or the network's is a fault of the page, and belongs on the console too.
    if (error.status === undefined) throw error;
  }
}

/** A list of faults of a text, as `line 5, column 8: message`; `onPlace` makes the place a button. */
export function faultList(faults, onPlace, attributes = {}) {
  const place = (fault) => `line ${fault.line}, column ${fault.column}`;
  const item = (fault) => el("li", {},
    onPlace ? button(place(fault), () => onPlace(fault), { class: "link" }) : el("strong", {}, place(fault)),
    `: ${fault.message}`);
  return el("ul", { class: "faults", ...attributes }, faults.map(item));
}
