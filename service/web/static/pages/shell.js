// What surrounds each page: light or dark paper, and the line that says when the server is gone.
// Header, footer, cautions and versions come with the HTML. Left out: all content.
import { ask } from "./ask.js";
import { el, setText } from "./elements.js";
import { clock } from "./numbers.js";
import { say, WORDS } from "./words.js";

const THEMES = ["auto", "light", "dark"];
const KEPT = "armspan-theme";
const PING_MS = 3000;
const SAY_BACK_MS = 10000;

let goneSince = null;
let backTimer = 0;

/**
 * Begin a page: fits the theme switch, and if asked looks now and then whether the server is there.
 * @param {{watch?: boolean}} how watch: true for pages that follow no stream
 */
export function begin({ watch = false } = {}) {
  fitThemeSwitch();
  if (watch) setInterval(ping, PING_MS);
}

/** Say that the first data stand: what waits for the page may look at it now. */
export function ready() {
  document.documentElement.dataset.ready = "yes";
}

/** Say that the server is gone; the first time counts. @param {Date} since */
export function gone(since = new Date()) {
  if (goneSince) return;
  goneSince = since;
  clearTimeout(backTimer);
  document.documentElement.dataset.connection = "gone";
  told(say(WORDS.shell.gone, { time: clock(since) }));
}

/** Say that the server answers again. */
export function back() {
  if (!goneSince) return;
  goneSince = null;
  document.documentElement.dataset.connection = "back";
  told(say(WORDS.shell.back, { time: clock(new Date()) }));
  backTimer = setTimeout(() => told(""), SAY_BACK_MS);
}

/** Return whether the server is gone. */
export const isGone = () => goneSince !== null;

/**
 * Call a function whenever the paper changes: by choice, with the screen, or for a printer.
 * @param {() => void} callback
 */
export function onTheme(callback) {
  document.addEventListener("themechange", callback);
  for (const query of ["(prefers-color-scheme: dark)", "print"]) {
    matchMedia(query).addEventListener("change", callback);
  }
}

function told(text) {
  const line = document.getElementById("connection");
  if (line) setText(line, text);
}

async function ping() {
  if (document.hidden) return;
  const control = new AbortController();
  const timer = setTimeout(() => control.abort(), PING_MS);
  const answer = await ask("/v1/ping", { signal: control.signal });
  clearTimeout(timer);
  if (answer.ok) back();
  else gone();
}

function fitThemeSwitch() {
  const place = document.getElementById("theme");
  if (!place) return;
  const now = document.documentElement.dataset.theme ?? "auto";
  const choice = el(
    "select",
    { id: "theme-choice", onchange: () => choose(choice.value) },
    THEMES.map((name) => el("option", { value: name, selected: name === now }, WORDS.shell[`theme_${name}`])),
  );
  place.replaceChildren(el("label", { for: "theme-choice" }, WORDS.shell.theme), choice);
}

function choose(name) {
  const root = document.documentElement;
  if (name === "auto") delete root.dataset.theme;
  else root.dataset.theme = name;
  try {
    if (name === "auto") localStorage.removeItem(KEPT);
    else localStorage.setItem(KEPT, name);
  } catch {
    // It holds for this page then.
  }
  document.dispatchEvent(new Event("themechange"));
}
