/**
 * Numbers as people read them: no digit that the uncertainty makes meaningless, and a unit at each. The command line
 * shows the same digits.
 */

/** Half-width of a 95 % interval in standard uncertainties. */
export const COVERAGE = 1.959964;

/** Digits after the point that show two digits of an uncertainty; six digits of the value where there is none. */
export function decimals(uncertainty, value) {
  const isKnown = uncertainty > 0 && Number.isFinite(uncertainty);
  const size = isKnown ? uncertainty : Math.abs(value);
  const more = isKnown ? 1 : 5;
  if (!(size > 0)) return 0;
  // The place of the first digit once it is rounded, as 0.0996 to 0.10.
  const place = Number(size.toExponential(more).split("e")[1]);
  return Math.min(Math.max(more - place, 0), 9);
}

/** A number with so many decimals, never `-0`. */
export function written(value, places) {
  const text = value.toFixed(places);
  return /^-[0.]*$/.test(text) ? text.slice(1) : text;
}

/** A value with the digits that its uncertainty leaves. */
export function shown(value, uncertainty) {
  const text = written(value, decimals(uncertainty, value));
  return uncertainty > 0 || !text.includes(".") ? text : text.replace(/\.?0+$/, "");
}

/** An uncertainty with its own two digits. */
export function twoDigits(uncertainty) {
  return written(uncertainty, decimals(uncertainty, uncertainty));
}

/** Whether a part of an uncertainty is nothing beside the whole. */
export function isNegligible(part, whole) {
  return part <= whole / 1000;
}

const GAUGE = /^([kM]?Pa|m?bar|psi|inHg|mmHg|mmH2O|inH2O|kgf\/cm2)g$/;

/** Unit of a difference: 1 degC more is 1 K more, and it is no matter what a pressure counts from. */
export function differenceUnit(unit) {
  if (unit === "degC") return "K";
  if (unit === "%") return "pp";
  return unit.replace(GAUGE, "$1").replace(/ vac$/, "");
}

/** `8024 kJ/kWh ± 23 kJ/kWh` in words; a value without an uncertainty is exact. */
export function estimate(value, sigma, unit) {
  if (value === null) return "can't be known from these meters";
  const told = `${shown(value, sigma)} ${unit}`;
  return sigma > 0 ? `${told} ± ${twoDigits(sigma)} ${differenceUnit(unit)}` : told;
}

/** Bytes in a unit that keeps them short. */
export function bytes(size) {
  const power = Math.min(Math.floor(Math.log10(Math.max(size, 1)) / 3), 3);
  return `${Number((size / 1000 ** power).toPrecision(3))} ${["B", "kB", "MB", "GB"][power]}`;
}
