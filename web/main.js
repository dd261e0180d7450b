/**
 * Meterwright's page. It knows the service only by its HTTP interface, and shows what the address after `#` says.
 *
 * From the ground up; no module imports one of a later group:
 *
 *   dom.js          elements made in script, everything as text
 *   number.js       digits and units                                words.js       pieces of sentences
 *   time.js         the plant's clock                               route.js       the address after `#`
 *   api.js          the service's paths and problems                events.js      what it tells unasked
 *   problem.js      problems and faults in words                    table.js       the sortable, filtered table
 *   state.js        plants, the chosen one, its logs
 *
 *   log_state.js    how one log stands                              progress.js    uploads and work under way
 *   plant_text.js   the field for a plant file                      finding.js     findings as sentences
 *   sheet_model.js  the sheet as data                               sheet.js       the sheet as a table
 *   balance.js      one balance
 *   trend_data.js   a trend as columns and words                    trend_plot.js  a trend as a plot
 *   trend_page.js   a trend with all that is said of it
 *
 *   shift.js, logs.js, trend.js, findings.js, plant.js              one view each: `show` at every visit
 *
 *   upload.js       logs that are dropped or chosen, one after another; plant files go to plant.js
 */

import { byId, el, fill, goTo } from "./dom.js";
import * as findings from "./findings.js";
import * as logs from "./logs.js";
import * as plant from "./plant.js";
import { attempt, problemBox } from "./problem.js";
import * as progress from "./progress.js";
import { link, route, settle } from "./route.js";
import * as shift from "./shift.js";
import { choosePlant, loadPlants, on, state } from "./state.js";
import * as trend from "./trend.js";
import * as upload from "./upload.js";

const VIEWS = { shift, logs, trend, findings, plant };

/** Where the browser keeps the plant that was chosen last, for an address that names none. */
const LAST_PLANT = "last plant";

/** View that is seen now. */
let seen = null;

/** Brings the page to what the address says. */
function follow() {
  return attempt(byId("trouble"), async () => {
    if (!state.plants.length) await loadPlants();
    const wanted = route();
    const known = state.plants.find((plant) => plant.id === wanted.plant);
    if (!known && wanted.plant) {
      fill(byId("trouble"), problemBox({ title: "No such plant", message: "The address names a plant that isn't here." }));
    } else {
      fill(byId("trouble"));
    }
    const plant = known || state.plants.find((plant) => plant.id === localStorage.getItem(LAST_PLANT)) || state.plants[0];
    if (plant?.id !== wanted.plant) settle(plant ? { plant: plant.id } : { plant: null });
    if (plant) localStorage.setItem(LAST_PLANT, plant.id);
    await choosePlant(plant?.id);
    display();
  });
}

/** Shows the view of the address and hides the others. */
function display() {
  const asked = VIEWS[route().view] ? route().view : "shift";
  const name = state.plant ? asked : "plant";
  const isNew = seen !== null && seen !== name;
  seen = name;
  drawViews(name);
  for (const key of Object.keys(VIEWS)) byId(`view-${key}`).hidden = key !== name;
  const heading = byId(`view-${name}`).querySelector("h1");
  document.title = [heading.textContent, state.plant?.name, "Meterwright"].filter(Boolean).join(" · ");
  if (isNew) {
    scrollTo(0, 0);
    heading.focus({ preventScroll: true });
  }
  VIEWS[name].show();
}

function drawViews(current) {
  for (const item of byId("views").querySelectorAll("a")) {
    item.href = link(item.dataset.view);
    if (item.dataset.view === current) item.setAttribute("aria-current", "page");
    else item.removeAttribute("aria-current");
  }
}

function drawPlants() {
  const select = byId("plant");
  fill(select, state.plants.map((plant) => el("option", { value: plant.id }, plant.name)));
  select.value = state.plant?.id || "";
  select.disabled = state.plants.length === 0;
}

function drawLine() {
  document.body.classList.toggle("cut-off", !state.isListening);
  fill(byId("trouble"), !state.isListening && problemBox({
    title: "The service doesn't answer",
    message: "What is shown may be old. The page connects again by itself as soon as the service is there.",
  }));
}

/** Links within the page: the address after `#` says what is shown, so these must not change it. */
function leadWithin(id, target) {
  byId(id).addEventListener("click", (event) => {
    event.preventDefault();
    goTo(byId(target));
  });
}

leadWithin("skip", "main");
leadWithin("to-cautions", "cautions");
byId("plant").addEventListener("change", (event) => {
  location.hash = link(seen, { plant: event.target.value });
});
on("plants", drawPlants);
on("plant", drawPlants);
on("line", drawLine);
for (const part of [progress, upload, shift, logs, trend, plant]) part.start();
addEventListener("hashchange", follow);
follow();
