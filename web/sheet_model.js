/**
 * The sheet as data: one row a tag or soft given, with everything that its cells show and are sorted by. Views draw rows
 * and know nothing of the balance they come from.
 */

import { decimals, differenceUnit, shown, twoDigits, written } from "./number.js";
import { halfWidth, verdict } from "./words.js";

/** @typedef {{name: string, description: string, quantity: string|null, unit: string, differenceUnit: string,
 *   read: string|null, halfWidth: string|null, balanced: string|null, uncertainty: string|null, change: string|null,
 *   statistic: string|null, verdict: string, standing: string, rank: number, numbers: Object}} SheetRow */

/** Those that others check first, then those that nothing checks, then those that took no part. */
const STANDINGS = ["suspect", "agrees", "unchecked", "excluded"];

/**
 * Rows of the tags or givens of a balance, the worst first.
 * @param {Object[]} reads
 * @param {(read: Object) => string} name
 * @returns {SheetRow[]}
 */
export function sheetRows(reads, name) {
  const rows = reads.map((read) => sheetRow(read, name(read)));
  const size = (row) => row.numbers.statistic ?? -1;
  rows.sort((a, b) => STANDINGS.indexOf(a.standing) - STANDINGS.indexOf(b.standing) || size(b) - size(a));
  rows.forEach((row, rank) => {
    row.rank = rank;
  });
  return rows;
}

function sheetRow(read, name) {
  const text = (value, write) => (value === null ? null : write(value));
  const { measured, sigma, reconciled, reconciled_sigma: balancedSigma, correction, statistic } = read;
  const words = verdict(read);
  // A change has the digits of whichever of reading and balanced value is known better.
  const best = Math.min(sigma ?? Infinity, balancedSigma ?? Infinity);
  return {
    name,
    description: read.description || "",
    quantity: read.quantity,
    unit: read.unit,
    differenceUnit: differenceUnit(read.unit),
    read: text(measured, (value) => shown(value, sigma)),
    halfWidth: measured === null ? null : text(halfWidth(sigma), twoDigits),
    balanced: text(reconciled, (value) => shown(value, balancedSigma)),
    uncertainty: text(balancedSigma, twoDigits),
    change: text(correction, (value) => written(value, decimals(best, value))),
    statistic: text(statistic, (value) => value.toFixed(2)),
    verdict: words,
    standing: STANDINGS.find((standing) => words.startsWith(standing)),
    rank: 0,
    numbers: {
      read: measured,
      halfWidth: halfWidth(sigma),
      balanced: reconciled,
      change: correction === null ? null : Math.abs(correction),
      statistic,
    },
  };
}
