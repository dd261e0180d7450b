/**
 * A field for a plant file. Faults are shown in place: their line is marked beside the text, the wrong word is
 * underlined, and the list beneath leads there. The text is kept across reloads until the service has taken it.
 */

import { announce, el, fill } from "./dom.js";
import { faultList } from "./problem.js";
import { count } from "./words.js";

/** Height of a line in the size of the text, as the style sheet has it. */
const LINE_HEIGHT = 1.5;

function byLine(faults) {
  const lines = new Map();
  for (const fault of faults) lines.set(fault.line, [...(lines.get(fault.line) || []), fault]);
  return lines;
}

/**
 * @param {{id: string, label: string}} words
 * @returns {{node: HTMLElement, text: () => string, set: (text: string, draft: string) => void,
 *   showFaults: (faults: Object[]) => void, taken: () => void}}
 */
export function plantText({ id, label }) {
  let draftKey = null;
  let faults = [];
  let isDrawing = false;
  const gutter = el("pre", { class: "gutter", "aria-hidden": "true" });
  const marks = el("pre", {});
  const list = el("div", { id: `${id}-faults` });
  const area = el("textarea", {
    id, rows: 22, wrap: "off", spellcheck: "false", autocapitalize: "off", autocomplete: "off",
    "aria-describedby": `${id}-faults`, oninput: edited, onscroll: follow,
  });

  /** The layers beneath scroll with the text. */
  function follow() {
    gutter.scrollTop = area.scrollTop;
    marks.style.transform = `translate(${-area.scrollLeft}px, ${-area.scrollTop}px)`;
  }

  /** A paste is told of line by line: what is drawn waits for its end. */
  function edited() {
    if (isDrawing) return;
    isDrawing = true;
    requestAnimationFrame(() => {
      isDrawing = false;
      if (draftKey) sessionStorage.setItem(draftKey, area.value);
      draw();
    });
  }

  function draw() {
    const lines = area.value.split("\n");
    const wrong = [...byLine(faults)].filter(([line]) => line <= lines.length);
    fill(gutter, lines.map((_, place) => place + 1).join("\n"),
      wrong.map(([line]) => atLine(line, { class: "wrong" }, `✖ ${line}`)));
    fill(marks, wrong.map(([line, found]) => atLine(line, {}, marked(lines[line - 1], found))));
    follow();
  }

  function goTo(fault) {
    const before = area.value.split("\n").slice(0, fault.line - 1);
    const start = before.reduce((sum, line) => sum + line.length + 1, 0) + fault.column - 1;
    area.focus();
    area.setSelectionRange(start, start + wordLength(area.value.slice(start)));
    area.scrollTop = Math.max(0, (fault.line - 6) * LINE_HEIGHT * parseFloat(getComputedStyle(area).fontSize));
  }

  function showFaults(found) {
    faults = found;
    if (found.length) area.setAttribute("aria-invalid", "true");
    else area.removeAttribute("aria-invalid");
    fill(list, found.length > 0 && faultList(found, goTo));
    draw();
    if (found.length) announce(count(found.length, "fault"));
  }

  return {
    node: el("div", { class: "plant-text" },
      el("label", { for: id }, label), el("div", { class: "editor" }, gutter, el("div", { class: "layers" },
        el("div", { class: "marks", "aria-hidden": "true" }, marks), area)), list),
    text: () => area.value,
    /** Puts in a text, or what was made of it and not yet taken: `draft` names it. */
    set(text, draft) {
      draftKey = `plant text ${draft}`;
      area.value = sessionStorage.getItem(draftKey) ?? text;
      showFaults([]);
    },
    /** Puts in a text as if it had been typed. */
    type(text) {
      area.value = text;
      edited();
      showFaults([]);
    },
    showFaults,
    taken() {
      sessionStorage.removeItem(draftKey);
      showFaults([]);
    },
  };
}

/** Length of what stands at a place up to the next gap, at least one. */
function wordLength(text) {
  return Math.max(1, text.match(/^("[^"\n]*"|[^\s,}\]]*)/)[0].length);
}

/** Something that lies over a line of the text. */
function atLine(line, attributes, ...children) {
  const node = el("div", attributes, children);
  node.style.top = `calc(var(--text-top) + ${(line - 1) * LINE_HEIGHT}em)`;
  return node;
}

/** A line with its wrong words marked. */
function marked(line, faults) {
  const parts = [];
  let done = 0;
  for (const { column } of [...faults].sort((a, b) => a.column - b.column)) {
    const start = Math.min(column - 1, line.length);
    if (start < done) continue;
    const end = start + wordLength(line.slice(start));
    parts.push(line.slice(done, start), el("mark", {}, line.slice(start, end) || " "));
    done = end;
  }
  return parts;
}
