/** One table for all: sortable by its headings, filtered as one types, scrolling in its own box where it is too wide. */

import { button, el, fill, goTo } from "./dom.js";
import { differenceUnit, isNegligible, twoDigits } from "./number.js";
import { count } from "./words.js";

/**
 * @typedef {Object} Column
 * @property {string} heading
 * @property {string} [hint] what the heading means
 * @property {boolean} [isNumber]
 * @property {"ascending"|"descending"} [first] the order that a first press gives
 * @property {(row: Object) => (string|Node|Array)} cell
 * @property {(row: Object) => (number|string|null)} sort what isn't known comes last in either order
 */

/**
 * @param {{id?: string, label: string, noun: string, columns: Column[], rows: Object[], key: (row) => string,
 *   rowClass?: (row) => string, search?: (row) => string, sort?: {column: number, order: string},
 *   memory?: Object}} options `rows` in the order shown first, which `sort` names; `search` is the text that the filter
 *   looks in; what its user chose is kept in `memory` for the next table of the kind
 */
export function dataTable(options) {
  const { columns, key } = options;
  const memory = options.memory || {};
  let sort = memory.sort || options.sort || null;
  let wanted = memory.wanted || "";
  const body = el("tbody");
  const shownCount = el("span", { class: "hint", role: "status" });
  const lines = new Map(options.rows.map((row) => [key(row), line(row, options)]));

  const headings = columns.map((column, place) => el("th", { scope: "col", class: column.isNumber ? "number" : null },
    el("button", { type: "button", class: "sort", title: column.hint, onclick: () => sortBy(place) },
      column.heading, el("span", { class: "arrow", "aria-hidden": "true" }))));

  function sortBy(place) {
    const first = columns[place].first || "ascending";
    const other = first === "ascending" ? "descending" : "ascending";
    sort = memory.sort = { column: place, order: sort?.column === place && sort.order === first ? other : first };
    draw();
  }

  function draw() {
    const rows = sort ? [...options.rows].sort(comparison(columns[sort.column].sort, sort.order)) : options.rows;
    const shown = wanted ? rows.filter((row) => options.search(row).toLowerCase().includes(wanted)) : rows;
    fill(body, shown.map((row) => lines.get(key(row))));
    headings.forEach((heading, place) => {
      if (sort?.column === place) heading.setAttribute("aria-sort", sort.order);
      else heading.removeAttribute("aria-sort");
    });
    const all = count(options.rows.length, options.noun);
    shownCount.textContent = wanted ? `${shown.length} of ${all}` : all;
  }

  const filter = options.search && el("input", {
    type: "search", autocomplete: "off", value: wanted,
    oninput: (event) => {
      wanted = memory.wanted = event.target.value.trim().toLowerCase();
      draw();
    },
  });
  const table = el("table", { id: options.id },
    el("caption", { class: "unseen" }, options.label), el("thead", {}, el("tr", {}, headings)), body);
  draw();
  return {
    node: el("div", { class: "table" },
      el("div", { class: "table-tools" },
        filter && el("label", { class: "field" }, "Filter ", filter), shownCount),
      el("div", { class: "table-box", role: "region", "aria-label": options.label, tabindex: "0" }, table)),
    /** Goes to a row, whatever the filter; tells whether there is one. */
    goToRow(name) {
      const row = lines.get(name);
      if (!row) return false;
      if (!row.isConnected) {
        filter.value = wanted = memory.wanted = "";
        draw();
      }
      goTo(row);
      return true;
    },
  };
}

function line(row, { columns, key, rowClass }) {
  const cells = columns.map((column, place) => el(place === 0 ? "th" : "td",
    { scope: place === 0 ? "row" : null, class: column.isNumber ? "number" : null }, column.cell(row)));
  return el("tr", { "data-key": key(row), class: rowClass?.(row) || null, tabindex: "-1" }, cells);
}

function comparison(value, order) {
  const sign = order === "ascending" ? 1 : -1;
  return (a, b) => {
    const [x, y] = [value(a), value(b)];
    if (x === null || y === null) return (x === null) - (y === null);
    const side = typeof x === "string" ? x.localeCompare(y, "en", { numeric: true }) : x - y;
    return sign * side;
  };
}

/** A number and its unit, the unit set apart so that numbers stand beneath one another. */
export function measure(number, unit) {
  return [number, " ", el("span", { class: "unit" }, unit)];
}

/** A repeatability; one that is nothing beside the whole uncertainty has no digits worth reading. */
export function repeatCell(repeat, sigma, unit) {
  if (repeat === null) return none("not known");
  return isNegligible(repeat, sigma) ? none("negligible") : measure(`± ${twoDigits(repeat)}`, differenceUnit(unit));
}

/** What stands where there is no number. */
export function none(words) {
  return el("span", { class: "none" }, words);
}

/** A press that does something within the page. */
export function linkButton(text, onclick) {
  return button(text, onclick, { class: "link" });
}
