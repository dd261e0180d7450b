/** What several views know in common: the plants, the chosen one and its logs. */

import * as api from "./api.js";
import { listen } from "./events.js";

const bus = new EventTarget();

/** @type {{plants: Object[], plant: Object|null, logs: Object[], isListening: boolean}} */
export const state = { plants: [], plant: null, logs: [], isListening: true };

/** Calls a function whenever something of a name changed: `plants`, `plant`, `logs`, `log` (one of them), `line`. */
export function on(name, heard) {
  bus.addEventListener(name, (event) => heard(event.detail));
}

function tell(name, detail) {
  bus.dispatchEvent(new CustomEvent(name, { detail }));
}

let deaf = () => {};

/** Asks for all plants. */
export async function loadPlants() {
  state.plants = await api.plants();
  tell("plants");
}

/** Makes a plant the chosen one; none where there is none of that id. */
export async function choosePlant(id) {
  const plant = state.plants.find((plant) => plant.id === id) || null;
  if (plant?.id === state.plant?.id) return;
  deaf();
  deaf = () => {};
  state.plant = plant;
  state.logs = [];
  tell("plant");
  if (!plant) return;
  deaf = listen(plant.id, {
    onLog: (log) => state.plant?.id === log.plant && noteLog(log),
    onOpen: () => {
      line(true);
      loadLogs().catch(() => line(false));
    },
    onLost: () => line(false),
  });
  await loadLogs();
}

/** Whether the service's news come in. */
function line(isListening) {
  if (state.isListening === isListening) return;
  state.isListening = isListening;
  tell("line");
}

async function loadLogs() {
  const { plant } = state;
  const logs = await api.logs(plant.id);
  if (state.plant !== plant) return;
  const known = new Map(state.logs.map((log) => [log.id, log]));
  state.logs = logs;
  tell("logs");
  for (const log of logs) if (known.has(log.id) && known.get(log.id).state !== log.state) tell("log", log);
}

/** Takes in how a log stands now. */
export function noteLog(log) {
  const place = state.logs.findIndex((known) => known.id === log.id);
  if (place < 0) state.logs.unshift(log);
  else state.logs[place] = log;
  tell("log", log);
  if (place < 0) tell("logs");
  if (log.state === "done") refreshPlant().catch(() => line(false));
}

/** Asks again for the counts and dates of the chosen plant, which a new log changes. */
export async function refreshPlant() {
  const { plant } = state;
  if (!plant) return;
  const fresh = await api.plant(plant.id);
  state.plants = state.plants.map((known) => (known.id === fresh.id ? fresh : known));
  if (state.plant === plant) state.plant = fresh;
  tell("plants");
}
