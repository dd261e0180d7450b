/** The service's HTTP interface: the one place that knows its paths and how it tells problems. */

const ROOT = "/api/v1";

/** Why a request was not done, in the service's words or ours. */
class Problem extends Error {
  /** @param {{title?: string, detail?: string, status?: number, faults?: Array, existing?: string}} told */
  constructor(told) {
    super(told.detail || told.title || "The service gave no reason.");
    this.title = told.title || "It didn't work";
    this.status = told.status || 0;
    /** @type {{line: number, column: number, message: string}[]} */
    this.faults = told.faults || [];
    this.existing = told.existing || null;
  }
}

const UNREACHED = {
  title: "The service doesn't answer",
  detail: "Nothing is lost: what you chose or typed is still here. See that the service runs and the network is up, " +
    "then try again.",
};

/** Parts of a path and its query, escaped. */
function path(parts, query = {}) {
  const told = Object.entries(query).filter(([, value]) => value !== null && value !== undefined && value !== "");
  const search = new URLSearchParams(told).toString();
  return `${ROOT}/${parts.map(encodeURIComponent).join("/")}${search && `?${search}`}`;
}

/** What a text says if it is JSON, else nothing. */
function parsed(text) {
  try {
    return JSON.parse(text);
  } catch {
    return null;
  }
}

function problem(status, text) {
  const told = parsed(text);
  if (told && typeof told === "object") return new Problem({ status, ...told });
  return new Problem({ status, title: `The service answered ${status}`, detail: text.slice(0, 300) });
}

async function ask(method, parts, { query, body, signal } = {}) {
  let response, text;
  try {
    response = await fetch(path(parts, query), { method, body, signal });
    text = await response.text();
  } catch (error) {
    if (error.name === "AbortError") throw error;
    throw new Problem(UNREACHED);
  }
  const answer = parsed(text);
  if (!response.ok || answer === null) throw problem(response.status, text);
  return { status: response.status, answer };
}

const get = async (parts, query, signal) => (await ask("GET", parts, { query, signal })).answer;

export const plants = async () => (await get(["plants"])).plants;
export const plant = (id) => get(["plants", id]);
export const createPlant = async (text) => (await ask("POST", ["plants"], { body: text })).answer;
export const revisions = async (id) => (await get(["plants", id, "revisions"])).revisions;
export const revision = (id, number) => get(["plants", id, "revisions", number]);
/** @returns {Promise<{status: number, answer: Object}>} 200 where that text is in force already, else 201 */
export const addRevision = (id, text, validFrom) =>
  ask("POST", ["plants", id, "revisions"], { query: { valid_from: validFrom }, body: text });

export const logs = async (plantId) => (await get(["logs"], { plant: plantId })).logs;
export const cancelLog = async (id) => (await ask("DELETE", ["logs", id, "work"])).answer;
export const restartLog = async (id) => (await ask("POST", ["logs", id, "work"])).answer;
export const eventsPath = (plantId) => path(["events"], { plant: plantId });

export const periods = async (logId, signal) => (await get(["steady-periods"], { log: logId }, signal)).steady_periods;
export const balancesOf = async (plantId, logId, signal) =>
  (await get(["balances"], { plant: plantId, log: logId, limit: 10000 }, signal)).balances;
export const balance = (id, signal) => get(["balances", id], {}, signal);
export const findings = async (plantId, limit, signal) =>
  (await get(["findings"], { plant: plantId, limit }, signal)).findings;
export const series = async (plantId) => (await get(["trends"], { plant: plantId })).series;
export const trend = (plantId, name, from, to, signal) =>
  get(["trends", name], { plant: plantId, from, to }, signal);

/**
 * Sends a log. XMLHttpRequest, because fetch can't tell how much of a body has been sent.
 * @param {{plant: string, periods: string, file: File}} log
 * @param {(share: number) => void} onProgress share sent, 0 to 1
 * @returns {{done: Promise<{status: number, answer: Object}>, abort: () => void}}
 */
export function uploadLog(log, onProgress) {
  const request = new XMLHttpRequest();
  const done = new Promise((resolve, reject) => {
    request.open("POST", path(["logs"], { plant: log.plant, name: log.file.name, periods: log.periods }));
    request.upload.onprogress = (event) => onProgress(event.total ? event.loaded / event.total : 0);
    request.onload = () => {
      const answer = parsed(request.responseText);
      const isDone = request.status >= 200 && request.status < 300 && answer !== null;
      if (isDone) resolve({ status: request.status, answer });
      else reject(problem(request.status, request.responseText));
    };
    request.onerror = () => reject(new Problem(UNREACHED));
    request.onabort = () => reject(new Problem({ title: "Upload stopped", detail: "Nothing was stored." }));
    request.send(log.file);
  });
  return { done, abort: () => request.abort() };
}

/** Gives one signal after another; a new one ends the request that went with the last. */
export class Latest {
  signal() {
    this.controller?.abort();
    this.controller = new AbortController();
    return this.controller.signal;
  }
}
