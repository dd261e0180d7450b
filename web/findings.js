/** Findings over time: what was suspected, in how many balances, since when and until when. */

import * as api from "./api.js";
import { byId, el, fill } from "./dom.js";
import { balanceLink } from "./finding.js";
import { estimate } from "./number.js";
import { attempt } from "./problem.js";
import { link } from "./route.js";
import { state } from "./state.js";
import { day, stretch } from "./time.js";
import { count, KINDS, probability } from "./words.js";

/** So many findings are asked for; older ones are counted in no group. */
const MOST = 5000;
/** So many balances of a group are listed; a year of hours would be thousands of lines. */
const LISTED = 200;

const requests = new api.Latest();

export function show() {
  const place = byId("history");
  return attempt(place, async () => {
    const { plant } = state;
    const findings = await api.findings(plant.id, MOST, requests.signal());
    if (!findings.length) {
      fill(place, el("p", { class: "calm" }, "No balance of this plant has a finding."));
      return;
    }
    fill(place,
      el("p", { class: "hint" }, `Times in ${plant.time_zone}. The newest first.`,
        findings.length === MOST && ` Only the newest ${MOST} findings are counted.`),
      el("ol", { class: "groups" }, groups(findings).map((group) => groupNode(group, plant.time_zone))));
  });
}

/** Findings of the same thing together, in the order of their newest. */
function groups(findings) {
  const byPlace = new Map();
  for (const finding of findings) {
    const key = `${finding.kind} ${finding.at}`;
    if (!byPlace.has(key)) byPlace.set(key, []);
    byPlace.get(key).push(finding);
  }
  return [...byPlace.values()];
}

function groupNode(group, zone) {
  const [newest, oldest] = [group[0], group.at(-1)];
  const details = el("details", {}, el("summary", {}, `The ${count(group.length, "balance")}`));
  // Made when it is opened: most groups never are.
  details.addEventListener("toggle", () => fill(details, details.firstChild, entries(group, zone)), { once: true });
  return el("li", { "data-key": newest.at },
    el("h2", {}, `${newest.at}: ${KINDS[newest.kind]}`),
    el("p", {}, "In ", el("strong", {}, count(group.length, "balance")),
      `, first on ${day(oldest.from, zone)}, last on ${day(newest.to, zone)}. `,
      newest.kind === "bias" && el("a", { href: link("trend", { series: newest.at }) }, `Trend of ${newest.at}`)),
    el("p", { class: "sentence" }, "The last: ", newest.sentence, " ", balanceLink(newest, "Show its balance")),
    details);
}

function entries(group, zone) {
  return el("ul", {}, group.slice(0, LISTED).map((finding) => el("li", {},
    balanceLink(finding, stretch(finding.from, finding.to, zone)),
    `: ${estimate(finding.estimate, finding.sigma, finding.unit)}, probability ${probability(finding.probability)}`)),
  group.length > LISTED && el("li", {}, `and ${group.length - LISTED} earlier ones`));
}
