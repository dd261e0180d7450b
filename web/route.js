/**
 * What is shown stands in the address after `#`, so that a link, reload, back and forward lead to the same thing:
 * `#plant=ID&view=trend&series=gross_heat_rate&range=30`.
 */

/** @typedef {{plant?: string, view?: string, log?: string, balance?: string, series?: string, range?: string,
 *   from?: string, to?: string}} Route */

/** Keys that go from view to view; the others belong to one. */
const KEPT = ["plant"];

/** @returns {Route} */
export function route() {
  return Object.fromEntries(new URLSearchParams(location.hash.slice(1)));
}

/** Address of something of the same plant, for a link. */
export function link(view, rest = {}) {
  const kept = Object.entries(route()).filter(([key]) => KEPT.includes(key));
  return address({ ...Object.fromEntries(kept), view, ...rest });
}

/** Goes there; `back` returns. */
export function go(view, rest = {}) {
  location.hash = link(view, rest);
}

/** Goes to the same view with some keys changed. */
export function change(changes) {
  location.hash = address({ ...route(), ...changes });
}

/** Writes into the address what was chosen by itself: nothing to return to. */
export function settle(changes) {
  history.replaceState(null, "", address({ ...route(), ...changes }));
}

function address(keys) {
  const told = Object.entries(keys).filter(([, value]) => value !== undefined && value !== null && value !== "");
  return `#${new URLSearchParams(told)}`;
}
