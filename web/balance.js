/** One balance on the page: what was found, how well everything agrees, and every value. */

import { el, fill, goTo } from "./dom.js";
import { findingItems } from "./finding.js";
import { shown, twoDigits } from "./number.js";
import { link } from "./route.js";
import { sheetRows } from "./sheet_model.js";
import { sheetTable } from "./sheet.js";
import { dataTable, linkButton, none, repeatCell } from "./table.js";
import { stretch } from "./time.js";
import { count, globalTest, listed } from "./words.js";

/** Order and filter of each table go from one balance to the next, so that periods can be compared. */
const memories = { sheet: {}, indicators: {}, quantities: {}, givens: {} };

/** Fills `place` with a balance. */
export function showBalance(place, balance, zone) {
  const title = el("h2", { class: "balance-title" }, stretch(balance.from, balance.to, zone));
  const origin = el("p", { class: "hint" }, `Times in ${zone}. Balanced with revision ${balance.revision.number} of the ` +
    `plant file, Meterwright ${balance.program_version}.`);
  if (balance.superseded_by) {
    origin.append(" A later log covers this time: its balance counts instead. ",
      el("a", { href: link("shift", { log: balance.superseded_by }) }, "Show that log"));
  }
  if (!balance.converged) {
    fill(place, title, origin, el("p", { class: "problem" }, el("strong", {}, "Not balanced: "),
      balance.reason || "no state closes every balance."), warnings(balance));
    return;
  }
  const tags = sheetTable(sheetRows(balance.tags, (tag) => tag.tag), {
    id: "sheet", memory: memories.sheet, label: "Tags, the worst first", noun: "tag", heading: "Tag", read: "Read",
    hasTrend: true });
  const sections = [
    section("Findings", el("div", { id: "findings" },
      el("p", { id: "global-test" }, globalTest(balance)),
      findingItems(balance.findings, tags.goToRow, new Set(balance.tags.map((tag) => tag.tag)))),
    balance.findings.length),
    section("Warnings", warnings(balance), balance.warnings.length),
    section("Out of service", balance.out_of_service.length > 0 && el("p", {}, listed(balance.out_of_service), "."),
      balance.out_of_service.length),
    section("Tags", tags.node, balance.tags.length),
    section("Indicators", balance.indicators.length > 0 && indicators(balance), balance.indicators.length),
    section("What really flowed", quantities(balance), balance.quantities.length),
    section("Soft givens", givens(balance), balance.givens.length),
  ].filter(Boolean);
  fill(place, title, origin, jumps(sections), sections.map((part) => part.node));
}

/** A section with its heading; nothing where it would be empty. */
function section(name, content, size) {
  if (!content) return null;
  const heading = el("h3", { tabindex: "-1" }, name);
  return { name, size, heading, node: el("section", { class: "part" }, heading, content) };
}

function jumps(sections) {
  const items = sections.map(({ name, size, heading }) =>
    el("li", {}, linkButton(name, () => goTo(heading)), el("span", { class: "hint" }, ` ${size}`)));
  return el("nav", { "aria-label": "Parts of the balance" }, el("ul", { class: "jumps" }, items));
}

function warnings(balance) {
  return balance.warnings.length > 0 && el("ul", {}, balance.warnings.map((text) => el("li", {}, text)));
}

function givens(balance) {
  if (!balance.givens.length) return null;
  return sheetTable(sheetRows(balance.givens, (given) => given.given), {
    id: "givens", memory: memories.givens, label: "Soft givens, the worst first", noun: "soft given", heading: "Given",
    read: "Stated", hasTrend: false }).node;
}

/** A value with its uncertainty and unit, or that it can't be known. */
function value({ value: number, sigma, unit }) {
  if (number === null) return none("can't be known from these meters");
  const width = sigma > 0 ? `± ${twoDigits(sigma)}` : sigma === 0 && "exact";
  return [shown(number, sigma), " ", el("span", { class: "plus" }, width), " ", el("span", { class: "unit" }, unit)];
}

const valueColumn = { heading: "Value ± u", hint: "Value and its standard uncertainty", isNumber: true, cell: value,
  sort: (row) => row.value };
const repeatColumn = { heading: "Repeatable to",
  hint: "The part of the standard uncertainty that is drawn anew each period: what comparisons over time go by",
  isNumber: true,
  cell: (row) => repeatCell(row.repeat_sigma, row.sigma, row.unit),
  sort: (row) => row.repeat_sigma };

function nameColumn(heading, name) {
  const toTrend = (series) => el("a", { href: link("trend", { series }), title: `Trend of ${series}` }, series);
  return { heading, cell: (row) => toTrend(name(row)), sort: name };
}

function indicators(balance) {
  const name = (row) => row.indicator;
  return dataTable({
    id: "indicators", memory: memories.indicators, label: "Indicators", noun: "indicator",
    columns: [nameColumn("Indicator", name), valueColumn, repeatColumn],
    rows: balance.indicators, key: name, search: name,
  }).node;
}

/** What is said of how a quantity is known. */
const CLASSES = {
  redundant: "redundant: read, and checked by other meters",
  observable: "observable: follows from what is read or given",
  unobservable: "can't be known from these meters",
};

function quantities(balance) {
  const readers = new Map();
  for (const { tag, quantity } of balance.tags) {
    if (quantity !== null) readers.set(quantity, [...(readers.get(quantity) || []), tag]);
  }
  const how = (row) => {
    const parts = [CLASSES[row.class]];
    if (row.at_bound) parts.push("at its bound");
    if (readers.has(row.quantity)) parts.push(`read by ${listed(readers.get(row.quantity))}`);
    return parts.join("; ");
  };
  const name = (row) => row.quantity;
  const unknown = balance.quantities.filter((row) => row.value === null).length;
  return el("div", {},
    unknown > 0 && el("p", {}, `${count(unknown, "quantity", "quantities")} can't be known from these meters.`),
    dataTable({
      id: "quantities", memory: memories.quantities, label: "What really flowed: balanced quantities", noun: "value",
      columns: [nameColumn("Quantity", name), valueColumn, repeatColumn,
        { heading: "How it is known", cell: how, sort: how }],
      rows: balance.quantities, key: name, search: (row) => `${row.quantity} ${how(row)}`,
    }).node);
}
