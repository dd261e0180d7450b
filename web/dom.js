/**
 * Elements made in script. Children and attributes go in as text, so that nothing that a file or the service says can
 * become markup.
 */

/**
 * @param {string} tag
 * @param {Object<string, *>} [attributes] names as in HTML; functions become listeners (`onclick`), false and null are
 *   left out, true is an empty attribute
 * @param {...(Node|string|number|null|undefined|false|Array)} children
 * @returns {HTMLElement}
 */
export function el(tag, attributes = {}, ...children) {
  const node = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) {
    if (typeof value === "function") node.addEventListener(name.slice(2), value);
    else if (value !== null && value !== undefined && value !== false) {
      node.setAttribute(name, value === true ? "" : String(value));
    }
  }
  node.append(...solid(children));
  return node;
}

/** Puts children in the place of what is in a node. */
export function fill(node, ...children) {
  node.replaceChildren(...solid(children));
}

/** @returns {HTMLElement} the element of the page's frame with that id */
export function byId(id) {
  return document.getElementById(id);
}

/** A button that looks like one. */
export function button(text, onclick, attributes = {}) {
  return el("button", { type: "button", onclick, ...attributes }, text);
}

/** Tells a screen reader what happened elsewhere on the page. */
export function announce(text) {
  byId("announce").textContent = text;
}

/** Moves the view and the keyboard to a node. */
export function goTo(node) {
  const calm = matchMedia("(prefers-reduced-motion: reduce)").matches;
  node.scrollIntoView({ block: "start", behavior: calm ? "auto" : "smooth" });
  node.focus({ preventScroll: true });
}

function solid(children) {
  return children.flat(Infinity).filter((child) => child !== null && child !== undefined && child !== false);
}
