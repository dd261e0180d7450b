/** Logs from a drop anywhere on the page or from the button, sent one after another. */

import { uploadLog } from "./api.js";
import { announce, byId } from "./dom.js";
import { takePlantFile } from "./plant.js";
import { addLog, addUpload } from "./progress.js";
import { go, route } from "./route.js";
import { noteLog, on, state } from "./state.js";
import { stamp } from "./time.js";

/** Uploads that wait for the one under way. */
const queue = [];
let isSending = false;
/** Where its user was when a log went up: who has moved on since isn't called back. */
const places = new Map();

export function start() {
  byId("log-input").addEventListener("change", (event) => {
    take([...event.target.files]);
    // The same file may be chosen again.
    event.target.value = "";
  });
  const carriesFiles = (event) => event.dataTransfer?.types.includes("Files");
  addEventListener("dragover", (event) => {
    if (!carriesFiles(event)) return;
    event.preventDefault();
    document.body.classList.add("dragging");
  });
  addEventListener("dragleave", (event) => {
    if (event.relatedTarget === null) document.body.classList.remove("dragging");
  });
  addEventListener("drop", (event) => {
    if (!carriesFiles(event)) return;
    event.preventDefault();
    document.body.classList.remove("dragging");
    take([...event.dataTransfer.files]);
  });
  on("log", leadToBalances);
}

/** Takes dropped or chosen files: a plant file to its form, logs to the service. */
function take(files) {
  for (const file of files) {
    if (file.name.toLowerCase().endsWith(".toml")) takePlantFile(file);
    else enqueue(file, state.plant, byId("periods").value);
  }
}

function enqueue(file, plant, periods) {
  const job = { file, plant, periods, isStopped: false, stop: () => {} };
  const shown = addUpload(file, () => {
    job.isStopped = true;
    job.stop();
  });
  job.shown = shown;
  queue.push(job);
  sendNext();
}

async function sendNext() {
  if (isSending || queue.length === 0) return;
  isSending = true;
  const job = queue.shift();
  if (job.isStopped) job.shown.done();
  else await send(job);
  isSending = false;
  sendNext();
}

async function send(job) {
  const again = () => enqueue(job.file, state.plant, job.periods);
  if (!job.plant) {
    job.shown.fail({ title: "There is no plant yet", message: "Create the plant this log is of, then try again." }, again);
    go("plant");
    return;
  }
  const { done, abort } = uploadLog({ plant: job.plant.id, periods: job.periods, file: job.file }, job.shown.progress);
  job.stop = abort;
  try {
    const { status, answer: log } = await done;
    job.shown.done();
    received(log, status === 200, job.plant);
  } catch (problem) {
    job.shown.fail(problem, again);
    announce(`${job.file.name}: ${problem.title}`);
  }
}

function received(log, isKnown, plant) {
  // An event may have told more of it in the meantime.
  const newest = state.logs.find((known) => known.id === log.id) || log;
  if (state.plant?.id !== plant.id) return;
  const note = isKnown ? `These bytes are there already, since ${stamp(log.uploaded_at, plant.time_zone)}. ` : "";
  addLog(newest, note);
  if (isKnown) announce(`${log.name} is there already`);
  places.set(log.id, location.hash);
  noteLog(newest);
}

/** Shows the balances of a log that was just sent, unless its user has gone elsewhere. */
function leadToBalances(log) {
  if (log.state !== "done" || !places.has(log.id)) return;
  const place = places.get(log.id);
  places.delete(log.id);
  const view = route().view || "shift";
  const isWaiting = place === location.hash && (view === "shift" || view === "logs");
  if (!isWaiting || log.balance_count === 0) return;
  go("shift", { log: log.id });
  scrollTo(0, 0);
}
