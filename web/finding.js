/** Findings as sentences, with what else could explain the same readings. */

import { el } from "./dom.js";
import { link } from "./route.js";
import { linkButton } from "./table.js";
import { listed, probability } from "./words.js";

/**
 * @param {Object[]} findings
 * @param {(tag: string) => void} goToTag
 * @param {Set<string>} tags names that lead to a row
 */
export function findingItems(findings, goToTag, tags) {
  if (!findings.length) return el("p", { class: "calm" }, "No error found.");
  return el("ol", { class: "findings" }, findings.map((finding) => item(finding, (text) => linked(text, goToTag, tags))));
}

function item(finding, linkTags) {
  const others = finding.indistinguishable_from;
  return el("li", {},
    el("p", { class: "sentence" }, linkTags(finding.sentence)),
    el("p", { class: "hint" },
      `Probability ${probability(finding.probability)}. `,
      others.length
        ? ["As possible by these readings: an error of ", linkTags(listed(others, "or")), "."]
        : "Nothing else explains these readings nearly as well."));
}

/** A text in which the names of tags lead to their rows. */
function linked(text, goToTag, tags) {
  return text.split(/([A-Za-z0-9][\w.-]*[\w])/).map((part) =>
    (tags.has(part) ? linkButton(part, () => goToTag(part)) : part));
}

/** A link to the balance a finding was made in. */
export function balanceLink(finding, text) {
  return el("a", { href: link("shift", { balance: finding.balance }) }, text);
}
