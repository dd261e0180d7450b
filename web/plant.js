/** Plants: those that are there, a new one from a plant file, and a new revision of the chosen one. */

import * as api from "./api.js";
import { announce, button, byId, el, fill } from "./dom.js";
import { plantText } from "./plant_text.js";
import { attempt, problemBox } from "./problem.js";
import { change, link } from "./route.js";
import { loadPlants, on, refreshPlant, state } from "./state.js";
import { day, instant, stamp } from "./time.js";

const creation = plantText({ id: "plant-text", label: "Plant file of a new plant" });
const revision = plantText({ id: "revision-text", label: "Plant file" });
const creationSaid = el("div");
const revisionSaid = el("div");
const revisionList = el("div");
const validFrom = el("input", { type: "datetime-local", id: "valid-from" });
const reviseTitle = el("h2");
/** Plant whose text stands in the form of revisions. */
let loaded = null;

export function start() {
  creation.set("", "new");
  fill(byId("plant-create"), el("h2", {}, "New plant"),
    el("p", { class: "hint" }, "Choose or drop a plant file (.toml), or write it here."),
    filePicker(creation, "plant-input"), creation.node, creationSaid,
    button("Create plant", create, { id: "create-plant", class: "main" }));
  fill(byId("plant-revise"), reviseTitle, revisionList, filePicker(revision, "revision-input"), revision.node,
    el("label", { class: "field" }, "Valid from ", validFrom),
    el("span", { class: "hint" }, " on the plant's clock; left empty: from now on"),
    revisionSaid,
    button("Store as a new revision", revise, { id: "store-revision", class: "main" }));
  on("plants", list);
  on("plant", list);
}

export function show() {
  list();
  byId("plant-revise").hidden = !state.plant;
  if (!state.plant || loaded === state.plant.id) return;
  attempt(revisionList, loadRevision);
}

/** Takes a plant file that was dropped somewhere on the page: to the form that is in use. */
export async function takePlantFile(file) {
  const isRevising = byId("plant-revise").contains(document.activeElement);
  (isRevising ? revision : creation).type(await file.text());
  change({ view: "plant" });
  announce(`${file.name} stands in the form`);
  byId(isRevising ? "revision-text" : "plant-text").focus();
}

function filePicker(form, id) {
  const input = el("input", {
    type: "file", id, accept: ".toml,text/plain",
    onchange: async () => {
      if (input.files[0]) form.type(await input.files[0].text());
      input.value = "";
    },
  });
  return el("label", { class: "button file" }, "Choose a plant file", input);
}

/** Does what a form asks for; faults go into its text, which stays as it is. */
async function submit(form, said, work) {
  fill(said);
  form.showFaults([]);
  try {
    await work();
  } catch (problem) {
    fill(said, problemBox(problem), problem.existing && el("p", {},
      el("a", { href: link("plant", { plant: problem.existing }) }, "Go to that plant"),
      " and store the text as a revision of it."));
    form.showFaults(problem.faults || []);
  }
}

function create() {
  return submit(creation, creationSaid, async () => {
    const plant = await api.createPlant(creation.text());
    creation.taken();
    creation.set("", "new");
    await loadPlants();
    fill(creationSaid, el("p", { class: "calm", role: "status" }, `${plant.name} is created. Now drop a log of it.`));
    change({ plant: plant.id, view: "shift", balance: null, log: null });
  });
}

function revise() {
  return submit(revision, revisionSaid, async () => {
    const zone = state.plant.time_zone;
    const from = validFrom.value ? instant(validFrom.value, zone) : null;
    const { status, answer } = await api.addRevision(state.plant.id, revision.text(), from);
    revision.taken();
    const told = status === 200
      ? "That is the text in force already: nothing was stored."
      : `Stored as revision ${answer.revision.number}, valid from ${since(answer.revision, answer.time_zone)}.`;
    await refreshPlant();
    await loadRevision();
    fill(revisionSaid, el("p", { class: "calm", role: "status" }, told));
  });
}

/** Puts the text in force into the form, and lists all revisions. */
async function loadRevision() {
  const { plant } = state;
  const [revisions, current] = await Promise.all([
    api.revisions(plant.id), api.revision(plant.id, plant.revision.number)]);
  if (state.plant?.id !== plant.id) return;
  loaded = plant.id;
  fill(reviseTitle, `Plant file of ${plant.name}`);
  revision.set(current.text, plant.id);
  fill(revisionSaid);
  const one = (entry) => el("li", {},
    button(`Revision ${entry.number}`, () => attempt(revisionSaid, async () => {
      revision.type((await api.revision(plant.id, entry.number)).text);
    }), { class: "link" }),
    `, valid from ${since(entry, plant.time_zone)}, stored ${stamp(entry.created_at, plant.time_zone)}`);
  fill(revisionList, el("p", { class: "hint" }, "A revision never changes. Press one to put its text below."),
    el("ul", {}, [...revisions].reverse().map(one)));
}

function since(entry, zone) {
  return entry.valid_from === null ? "the beginning" : stamp(entry.valid_from, zone);
}

function list() {
  const heading = (text) => el("th", { scope: "col" }, text);
  const row = (plant) => el("tr", {},
    el("th", { scope: "row" }, el("a", {
      href: link("shift", { plant: plant.id }), "aria-current": plant.id === state.plant?.id ? "true" : null }, plant.name)),
    el("td", {}, plant.time_zone),
    el("td", { class: "number" }, String(plant.revision.number)),
    el("td", { class: "number" }, String(plant.log_count)),
    el("td", { class: "number" }, String(plant.balance_count)),
    el("td", {}, plant.first_balance === null ? "no balance yet"
      : `${day(plant.first_balance, plant.time_zone)} to ${day(plant.last_balance, plant.time_zone)}`));
  fill(byId("plant-list"), state.plants.length === 0
    ? el("p", {}, "There is no plant yet. A plant file describes one: its machines, streams and instruments.")
    : el("div", { class: "table-box", role: "region", "aria-label": "Plants", tabindex: "0" },
      el("table", {}, el("caption", { class: "unseen" }, "Plants"),
        el("thead", {}, el("tr", {}, heading("Plant"), heading("Time zone"), heading("Revision"), heading("Logs"),
          heading("Balances"), heading("From, to"))),
        el("tbody", {}, state.plants.map(row)))));
}
