/** Times in the plant's own zone, which is not always the browser's. */

const formats = new Map();

/** Formatting is asked for thousands of times with few zones. */
function format(zone) {
  if (!formats.has(zone)) {
    formats.set(zone, new Intl.DateTimeFormat("en-GB", {
      timeZone: zone, year: "numeric", month: "2-digit", day: "2-digit", hour: "2-digit", minute: "2-digit",
      second: "2-digit", hourCycle: "h23", timeZoneName: "longOffset",
    }));
  }
  return formats.get(zone);
}

/** Date, time of day and offset of a time (RFC 3339 or ms) as a clock on the plant's wall shows it. */
function wall(time, zone) {
  const parts = Object.fromEntries(format(zone).formatToParts(new Date(time)).map((part) => [part.type, part.value]));
  const seconds = parts.second === "00" ? "" : `:${parts.second}`;
  return {
    date: `${parts.year}-${parts.month}-${parts.day}`,
    clock: `${parts.hour}:${parts.minute}${seconds}`,
    offset: parts.timeZoneName.slice(3) || "+00:00",
  };
}

/** `2026-03-01 06:00 +01:00`. The offset tells the two hours apart that the end of summer time makes of one. */
export function stamp(time, zone) {
  const { date, clock, offset } = wall(time, zone);
  return `${date} ${clock} ${offset}`;
}

/** `2026-03-01` */
export function day(time, zone) {
  return wall(time, zone).date;
}

/** A stretch of time as short as it can be said. */
export function stretch(from, to, zone) {
  const [a, b] = [wall(from, zone), wall(to, zone)];
  if (from === to) return stamp(from, zone);
  if (a.offset !== b.offset) return `${stamp(from, zone)} to ${stamp(to, zone)}`;
  if (a.date !== b.date) return `${a.date} ${a.clock} to ${b.date} ${b.clock} ${a.offset}`;
  return `${a.date} ${a.clock} to ${b.clock} ${a.offset}`;
}

/**
 * The time at which the plant's clock shows a date and time of day.
 * @param {string} local `2026-03-01` or `2026-03-01T06:00`
 * @returns {string|null} RFC 3339 in UTC, nothing where the text is no time
 */
export function instant(local, zone) {
  const asUtc = Date.parse(local.length === 10 ? `${local}T00:00Z` : `${local}Z`);
  if (Number.isNaN(asUtc)) return null;
  // The offset at a first guess may be that of the other side of a change of the clock: the second is right.
  let time = asUtc;
  for (let pass = 0; pass < 2; pass += 1) time = asUtc - offset(time, zone);
  return new Date(time).toISOString();
}

function offset(time, zone) {
  const [, sign, hours, minutes] = wall(time, zone).offset.match(/([+-])(\d\d):?(\d\d)?/);
  return (sign === "-" ? -1 : 1) * (Number(hours) * 60 + Number(minutes || 0)) * 60000;
}
