// Elements made by script: text goes in as text alone, so that no name in the data can be markup.
// Left out: any frame of components; a page holds its elements itself and writes what changed.

const SVG = "http://www.w3.org/2000/svg";

/**
 * Return a new element. Attributes that are null or false are left out, true is an empty one,
 * a function (onclick) is called on that event, "dataset" holds data- attributes.
 * @param {string} tag
 * @param {Record<string, any>} attributes
 * @param {...(Node|string|number|null|undefined|Array)} children
 * @returns {HTMLElement}
 */
export function el(tag, attributes = {}, ...children) {
  return dressed(document.createElement(tag), attributes, children);
}

/**
 * Return a new SVG element.
 * @param {string} tag
 * @param {Record<string, any>} attributes
 * @param {...(Node|string|number|null|undefined|Array)} children
 * @returns {SVGElement}
 */
export function svg(tag, attributes = {}, ...children) {
  return dressed(document.createElementNS(SVG, tag), attributes, children);
}

/** What can be chosen, in the words it is said with, one of them chosen now. */
export const options = (values, now) =>
  values.map((one) => el("option", { value: one, selected: one === now }, one));

/**
 * Write a text only where it is another one: what stays costs no layout.
 * @param {Node} node
 * @param {string} text
 */
export function setText(node, text) {
  if (node.textContent !== text) node.textContent = text;
}

/**
 * Set an attribute only where it is another one; null takes it away.
 * @param {Element} element
 * @param {string} name
 * @param {string|null} value
 */
export function setAttribute(element, name, value) {
  if (value === null) element.removeAttribute(name);
  else if (element.getAttribute(name) !== value) element.setAttribute(name, value);
}

/**
 * Put other children into an element.
 * @param {Element} element
 * @param {...(Node|string|number|null|undefined|Array)} children
 */
export function fill(element, ...children) {
  element.replaceChildren(...nodes(children));
}

function dressed(element, attributes, children) {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null || value === undefined || value === false) continue;
    if (typeof value === "function") element.addEventListener(name.replace(/^on/, ""), value);
    else if (name === "dataset") Object.assign(element.dataset, value);
    else element.setAttribute(name, value === true ? "" : String(value));
  }
  element.append(...nodes(children));
  return element;
}

function nodes(children) {
  return children
    .flat(Infinity)
    .filter((child) => child !== null && child !== undefined && child !== false)
    .map((child) => (child instanceof Node ? child : document.createTextNode(String(child))));
}
