/** What the service tells without being asked: how the work on logs goes on. */

import { eventsPath } from "./api.js";

/** After a connection is closed for good, another is tried after this time, ms. */
const PAUSE = 5000;

/**
 * Listens to a plant's logs.
 * @param {string} plant
 * @param {{onLog: (log: Object) => void, onOpen: () => void, onLost: () => void}} heard `onOpen` is called at every
 *   connection, also after a gap in which something may have been missed
 * @returns {() => void} stops listening
 */
export function listen(plant, heard) {
  let source, timer;
  const connect = () => {
    source = new EventSource(eventsPath(plant));
    source.addEventListener("open", heard.onOpen);
    source.addEventListener("log", (event) => heard.onLog(JSON.parse(event.data)));
    source.addEventListener("error", () => {
      heard.onLost();
      // The browser connects again by itself unless the service refused.
      if (source.readyState === EventSource.CLOSED) timer = setTimeout(connect, PAUSE);
    });
  };
  connect();
  return () => {
    clearTimeout(timer);
    source.close();
  };
}
