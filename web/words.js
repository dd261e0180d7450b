/** Pieces of sentences that more than one view says. */

import { COVERAGE, differenceUnit, twoDigits } from "./number.js";

/** `1 period`, `6 periods` */
export function count(number, one, many = `${one}s`) {
  return `${number} ${number === 1 ? one : many}`;
}

/** Names one after another: `a, b and c`. */
export function listed(names, last = "and") {
  return names.length < 2 ? names.join("") : `${names.slice(0, -1).join(", ")} ${last} ${names.at(-1)}`;
}

/** A probability with two decimals, and never as if it were certain. */
export function probability(value) {
  if (value >= 0.995) return "above 0.99";
  return value < 0.005 ? "below 0.01" : value.toFixed(2);
}

export const KINDS = { bias: "bias", loss: "loss", given: "wrong given", shared: "shared error" };

export const PERIODS = { steady: "steady periods", row: "each row a period", whole: "the whole log one period" };

/** How a log stands, in words. */
export function logState(log) {
  switch (log.state) {
    case "waiting": return "waiting for its turn";
    case "working": return log.phase === "balancing" && log.period_count !== null
      ? `balancing ${log.balance_count} of ${count(log.period_count, "period")}`
      : "reading";
    case "done": return `done: ${count(log.balance_count, "period")} balanced${rejected(log)}`;
    case "failed": return "failed";
    case "cancelled": return `cancelled; ${count(log.balance_count, "balance")} kept`;
    default: return log.state;
  }
}

function rejected(log) {
  return log.rejected_count ? `, ${count(log.rejected_count, "stretch", "stretches")} not` : "";
}

/** What the global tests say of a balance. */
export function globalTest(balance) {
  const { global_test: before, global_test_after: after, findings } = balance;
  if (!before) return "There is no global test.";
  if (!findings.length || !after) return `Global test ${figures(before)}: ${meaning(before)}`;
  return `Global test ${figures(before)}; with what is found accounted for ${figures(after)}: ${meaning(after)}`;
}

function figures(test) {
  const freedom = `${count(test.degrees_of_freedom, "degree")} of freedom`;
  return `${test.statistic.toFixed(2)}, 95 % limit ${test.critical.toFixed(2)} (${freedom})`;
}

function meaning(test) {
  if (test.degrees_of_freedom === 0) return "no reading is checked by another.";
  if (test.passes) return "as a whole the readings agree within their uncertainties.";
  return "as a whole the readings contradict one another by more than their uncertainties allow. At least one is " +
    "wrong or less certain than stated, or the plant file leaves something out.";
}

/** An error that shows only beyond so many of a meter's sigmas is no comfort worth telling. */
const ABSURD = 100;

/** What is said of a tag or a given. */
export function verdict(read) {
  const bias = read.minimum_detectable_bias;
  const size = bias === null ? null : `${twoDigits(bias)} ${differenceUnit(read.unit)}`;
  switch (read.verdict) {
    case "suspect": return "suspect";
    case "excluded": return read.samples === 0 ? "excluded: no good reading" : "excluded: see the warnings";
    case "trusted": return size === null ? "unchecked" : `agrees (would show from ${size})`;
    default:
      if (read.quantity === null) return "unchecked: reads nothing that is balanced";
      return size !== null && bias < ABSURD * read.sigma ? `unchecked (would show only from ${size})` : "unchecked";
  }
}

/** Half-width of the 95 % interval of a standard uncertainty. */
export function halfWidth(sigma) {
  return sigma === null ? null : sigma * COVERAGE;
}
