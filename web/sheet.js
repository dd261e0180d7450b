/** The sheet: tags or soft givens of a balance as a table. */

import { el } from "./dom.js";
import { link } from "./route.js";
import { dataTable, measure, none } from "./table.js";

/** What a statistic of nothing means. */
const UNTESTED = "untested";

/**
 * @param {import("./sheet_model.js").SheetRow[]} rows
 * @param {{id: string, label: string, noun: string, heading: string, read: string, hasTrend: boolean}} words
 */
export function sheetTable(rows, words) {
  const columns = [
    {
      heading: words.heading,
      cell: (row) => [
        words.hasTrend
          ? el("a", { href: link("trend", { series: row.name }), title: `Trend of ${row.name}` }, row.name) : row.name,
        row.description && el("span", { class: "description" }, row.description)],
      sort: (row) => row.name,
    },
    number(words.read, (row) => row.read, (row) => row.unit, "no reading", "read"),
    number("Half-width", (row) => row.halfWidth, (row) => row.differenceUnit, "", "halfWidth",
      "Half-width of the reading's 95 % interval: 1.96 standard uncertainties"),
    {
      heading: "Balanced ± u",
      hint: "Balanced value and its standard uncertainty, with the findings accounted for",
      isNumber: true,
      cell: (row) => (row.balanced === null ? none("can't be known from these meters")
        : [row.balanced, " ", row.uncertainty && el("span", { class: "plus" }, `± ${row.uncertainty}`), " ",
          el("span", { class: "unit" }, row.unit)]),
      sort: (row) => row.numbers.balanced,
    },
    number("Change", (row) => row.change, (row) => row.differenceUnit, "", "change", "Balanced minus read"),
    {
      heading: "Test",
      hint: "Measurement test: the change in its own standard deviations, before the findings are accounted for",
      isNumber: true,
      first: "descending",
      cell: (row) => (row.statistic === null ? none(UNTESTED) : row.statistic),
      sort: (row) => row.numbers.statistic,
    },
    {
      heading: "Verdict",
      hint: "The worst first: what others check, then what nothing checks, then what took no part",
      cell: (row) => el("span", { class: `verdict ${row.standing}` }, row.verdict),
      sort: (row) => row.rank,
    },
  ];
  return dataTable({
    ...words,
    columns,
    rows,
    key: (row) => row.name,
    rowClass: (row) => row.standing,
    search: (row) => `${row.name} ${row.description} ${row.quantity} ${row.verdict}`,
    sort: { column: columns.length - 1, order: "ascending" },
  });
}

function number(heading, text, unit, missing, value, hint) {
  return {
    heading,
    hint,
    isNumber: true,
    first: value === "change" || value === "halfWidth" ? "descending" : "ascending",
    cell: (row) => (text(row) === null ? none(missing) : measure(text(row), unit(row))),
    sort: (row) => row.numbers[value],
  };
}
