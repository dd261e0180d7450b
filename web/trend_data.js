/** A trend as columns to plot, and as words. */

import { COVERAGE, decimals, differenceUnit, estimate, isNegligible, shown, twoDigits, written } from "./number.js";
import { stretch } from "./time.js";
import { count } from "./words.js";

/** Where there is no balance for so many times as long as usual, and for days, no line says what was in between. */
const LONG_GAP = 10;
/** Nights and weekends are no gap, ms. */
const SHORT_GAP = 3 * 86400000;

/**
 * Columns for the plot. Between the values on the two sides of a break or a long gap stands a row without any, so that
 * no line is drawn through it.
 * @returns {{columns: Array[], points: (number|null)[],
 *   breaks: {time: number, at: number, number: number, causes: string[]}[]}} `columns`: times (ms), lower and upper edge
 *   of the band, value, reading; `points`: for each row the index into the trend, or null at a break or gap
 */
export function plotData(trend) {
  const middle = (index) => (trend.from[index] + trend.to[index]) / 2;
  const causes = new Map(trend.breaks.map((change) => [change.at, change.causes]));
  const steps = trend.from.slice(1).map((_, index) => middle(index + 1) - middle(index)).sort((a, b) => a - b);
  const longest = Math.max(LONG_GAP * steps[Math.floor(steps.length / 2)], SHORT_GAP);
  const columns = [[], [], [], [], []];
  const points = [];
  const breaks = [];
  const row = (point, cells) => {
    points.push(point);
    cells.forEach((cell, place) => columns[place].push(cell));
  };
  trend.value.forEach((value, index) => {
    const change = index > 0 && causes.get(trend.from[index]);
    if (change || (index > 0 && middle(index) - middle(index - 1) > longest)) {
      const time = (middle(index - 1) + middle(index)) / 2;
      if (change) breaks.push({ time, at: trend.from[index], number: breaks.length + 1, causes: change });
      row(null, [time, null, null, null, null]);
    }
    const reach = trend.repeat_sigma[index] === null || value === null ? null : trend.repeat_sigma[index] * COVERAGE;
    const [low, high] = reach === null ? [null, null] : [value - reach, value + reach];
    row(index, [middle(index), low, high, value, trend.measured?.[index] ?? null]);
  });
  return { columns, points, breaks };
}

/** What is known of one point, as a sentence. */
export function pointWords(trend, index, zone) {
  const { unit } = trend;
  const parts = [`${stretch(trend.from[index], trend.to[index], zone)}: ` +
    estimate(trend.value[index], trend.sigma[index], unit)];
  const repeat = trend.repeat_sigma[index];
  if (repeat !== null && !isNegligible(repeat, trend.sigma[index])) {
    parts.push(`repeatable to ± ${twoDigits(repeat)} ${differenceUnit(unit)}`);
  }
  const read = trend.measured?.[index];
  if (trend.measured) parts.push(read === null ? "no reading" : `read ${shown(read, trend.sigma[index])} ${unit}`);
  return parts.join("; ");
}

/** The slope with its interval, or why there is none. */
export function slopeWords(trend) {
  const { slope } = trend;
  if (!slope) return `No slope: ${trend.slope_reason || "it can't be worked out"}.`;
  const { per_month: middle, low, high, level, unit, points, method } = slope;
  // The digits that a standard uncertainty behind the interval would leave.
  const places = decimals((high - low) / (2 * COVERAGE), middle);
  const ends = `${written(low, places)} to ${written(high, places)}`;
  const sign = middle > 0 ? "+" : "";
  const meaning = low > 0 || high < 0 ? "" : " The interval holds zero: a change can't be told from none.";
  return `Slope ${sign}${written(middle, places)} ${unit} per month (${Math.round(level * 100)} % interval ${ends} ` +
    `${unit} per month; ${count(points, "point")}). ${method}.${meaning}`;
}

/** What a reader without the plot needs first: how many, first, last, mean. */
export function summaryWords(trend, zone) {
  const known = trend.value.map((_, index) => index).filter((index) => trend.value[index] !== null);
  if (!known.length) return `${count(trend.value.length, "balance")}, and in none of them is the value known.`;
  const at = (index) => `${estimate(trend.value[index], trend.sigma[index], trend.unit)} ` +
    `(${stretch(trend.from[index], trend.to[index], zone)})`;
  const mean = known.reduce((sum, index) => sum + trend.value[index], 0) / known.length;
  const [first, last] = [known[0], known.at(-1)];
  const unknown = trend.value.length - known.length;
  return `${count(known.length, "value")}. First ${at(first)}, last ${at(last)}, ` +
    `mean ${shown(mean, trend.sigma[last])} ${trend.unit}.` +
    (unknown ? ` In ${count(unknown, "balance")} it can't be known.` : "");
}
