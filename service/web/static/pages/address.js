// What the viewer chose stands in the address: a page can be sent, kept and opened again as it was.
// Left out: values that change by themselves (a live pose), and what is kept on this screen alone.

/**
 * Return what the address says of these names, the defaults where it says nothing.
 * @template {Record<string, string>} T
 * @param {T} defaults
 * @returns {T}
 */
export function chosen(defaults) {
  const said = new URLSearchParams(location.search);
  const found = { ...defaults };
  for (const name of Object.keys(defaults)) if (said.has(name)) found[name] = said.get(name);
  return found;
}

/**
 * Write choices into the address, without a new step in the browser's history.
 * @param {Record<string, string|null|undefined>} changes null, undefined or "" take a name out
 */
export function choose(changes) {
  const said = new URLSearchParams(location.search);
  for (const [name, value] of Object.entries(changes)) {
    if (value === null || value === undefined || value === "") said.delete(name);
    else said.set(name, value);
  }
  const text = said.toString().replace(/=(?=&|$)/g, "").replace(/%2C/g, ",");
  history.replaceState(history.state, "", location.pathname + (text && `?${text}`) + location.hash);
}

/**
 * Return a path with a query; what is null, undefined or "" is left out.
 * @param {string} path
 * @param {Record<string, string|number|null|undefined>} parameters
 * @returns {string}
 */
export function withQuery(path, parameters) {
  const said = new URLSearchParams();
  for (const [name, value] of Object.entries(parameters)) {
    if (value !== null && value !== undefined && value !== "") said.set(name, String(value));
  }
  const text = said.toString().replace(/%2C/g, ",");
  return text ? `${path}?${text}` : path;
}
