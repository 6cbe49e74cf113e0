// The table of places: what was read, verdict, reason; counts to sift by; a hundred on a page.
// Idea: one line for each line of the list, in its order, from the moment it is read; a verdict is
// told by a sign, a word and a sentence. Left out: asking, and all about the chosen place.

import { el, fill, setAttribute, svg } from "./elements.js";
import { length, number, signs, unitsOf } from "./numbers.js";
import { SIGNS } from "./reach_signs.js";
import { counted } from "./reach_survey.js";
import { say, WORDS } from "./words.js";

const PAGE = 100;
const KINDS = [...Object.keys(SIGNS), "open"];
/** Codes of the interface with which a place is reachable, but. */
const OUTSIDE_WORK = 3, CARE = new Set([1, 2, OUTSIDE_WORK]);
const STATES = new Set(["near-singular", "singular"]);

/** @typedef {object} Row place as read, line; fault of the line in words; result, refused as answered. */

/**
 * What is told of a row: a verdict of the interface; "care" for one that is reachable, but near
 * singular or beyond working travel; "unread" for a line that cannot be read, "open" before the answer.
 * @param {Row} row
 */
export function kindOf({ fault, refused, result }) {
  if (fault) return "unread";
  if (refused) return "refused";
  if (!result) return "open";
  return result.verdict === "reachable" && CARE.has(result.code) ? "care" : result.verdict ?? "refused";
}

/** What a row is told by, in words: a place that is reached, but not as it is to be come to, is no far one. */
export function verdictOf(row) {
  const kind = kindOf(row), isWay = row.result?.reason?.stage === "approach";
  return WORDS.reach.verdicts[isWay && kind === "unreachable" ? "no-approach" : kind] ?? kind;
}

/**
 * Return the table in a place of the page.
 * @param {HTMLElement} place
 * @param {(at: number, isPointed: boolean) => void} chosen called with the number of a row
 */
export function placesTable(place, chosen) {
  const table = { place, chosen, rows: [], units: "mm-deg", page: 0, sift: "", at: -1 };
  place.addEventListener("keydown", (event) => step(table, event));
  return {
    show(rows, units) {
      Object.assign(table, { rows, units, page: 0, sift: "", at: -1 });
      draw(table);
    },
    renew: () => draw(table),
    choose: (at) => choose(table, at, false),
    whole(isWhole) {
      table.isWhole = isWhole;
      draw(table);
    },
  };
}

function draw(table) {
  const words = WORDS.reach.list, { place } = table;
  if (!table.rows.length) return fill(place);
  const shown = sifted(table);
  const first = table.isWhole ? 0 : table.page * PAGE;
  const part = table.isWhole ? shown : shown.slice(first, first + PAGE);
  const heads = ["number", "name", "place", "verdict", "travel_left", "why"];
  const places = aligned(part.map((at) => table.rows[at].place?.position ?? []), table.units);
  const focused = place.contains(document.activeElement) ? document.activeElement.dataset.at : undefined;
  fill(
    place, counts(table),
    el("table", { class: "list", role: "table" }, el("caption", { class: "unseen" }, words.caption),
      el("thead", { role: "rowgroup" }, el("tr", { role: "row" }, heads.map((head) => el(
        "th", { scope: "col", role: "columnheader", class: head },
        head === "place" ? placeHead(table) : words[head])))),
      el("tbody", { role: "rowgroup" }, part.map((at, i) => line(table, at, places[i])))),
    shown.length > PAGE ? pages(table, first, shown.length) : null,
  );
  // What is drawn anew keeps the focus.
  if (focused) place.querySelector(`.choice[data-at="${focused}"]`)?.focus({ preventScroll: true });
}

const placeHead = ({ units }) => say(WORDS.reach.list.place, { unit: unitsOf(units).length });

function sifted({ rows, sift }) {
  const all = rows.map((row, at) => at);
  return sift ? all.filter((at) => kindOf(rows[at]) === sift) : all;
}

function counts(table) {
  const found = new Map();
  for (const row of table.rows) found.set(kindOf(row), (found.get(kindOf(row)) ?? 0) + 1);
  const key = (sift, count) => el("button", {
    type: "button", "aria-pressed": String(table.sift === sift),
    onclick() {
      Object.assign(table, { sift, page: 0 });
      draw(table);
      table.place.querySelector(`[aria-pressed="true"]`)?.focus();
    },
  }, sift ? sign(sift) : null, el("b", {}, counted(count)), ` ${WORDS.reach.verdicts[sift || "all"]}`);
  return el("div", { class: "counts", role: "group", "aria-label": WORDS.reach.list.sift },
    key("", table.rows.length),
    KINDS.filter((name) => found.has(name)).map((name) => key(name, found.get(name))));
}

/** The sign of what is told. @param {string} kind */
export function sign(kind) {
  const path = SIGNS[kind];
  return path
    ? svg("svg", { viewBox: "0 0 20 20", class: "sign", "aria-hidden": "true" }, svg("path", { d: path }))
    : null;
}

/** How a row is called. @param {Row} row */
export const nameOf = (row) => row.name ?? row.place?.name
  ?? say(WORDS.reach.list.line, { line: row.place?.line ?? row.line });

/** Positions as texts in which x stands below x, y below y, z below z. */
function aligned(positions, units) {
  const texts = positions.map((position) => position.map((one) => length(one, units)));
  const wide = [0, 1, 2].map((i) => Math.max(0, ...texts.map((one) => one[i]?.length ?? 0)));
  return texts.map((one) => one.map((text, i) => text.padStart(wide[i])).join("  "));
}

function line(table, at, place) {
  const row = table.rows[at], { result } = row;
  const kind = kindOf(row), why = said(row), label = nameOf(row);
  const margin = result?.solutions?.[0]?.margin;
  const isChosen = at === table.at;
  const key = el("button", {
    type: "button", class: "choice", dataset: { at }, "aria-pressed": String(isChosen),
    "aria-label": say(WORDS.reach.list.show, { number: at + 1, name: label }),
    tabindex: at === focusable(table) ? 0 : -1,
  }, label);
  const cell = (name, ...content) => el("td", { role: "cell", class: name }, ...content);
  return el("tr", {
    role: "row", class: `is-${kind}`, dataset: { at, verdict: result?.verdict ?? kind },
    onclick: () => choose(table, at, true), "aria-current": isChosen ? "true" : null },
    cell("number", at + 1),
    el("th", { role: "rowheader", scope: "row", class: "name" }, key),
    cell("place figures", place),
    cell("verdict", sign(kind), el("b", {}, verdictOf(row))),
    cell("travel_left figures", margin === undefined ? "" : percent(margin)),
    cell("why", why));
}

/** How near to singular the best posture is; a survey keeps the state alone. */
function stateOf(best) {
  const state = best?.singularity?.state ?? best?.state;
  if (!state || state === "regular") return "";
  return best.singularity ? stateSaid(best.singularity) : WORDS.sheet[state];
}

/** The sentence of a row. @param {Row} row */
export function said({ fault, refused, result }) {
  if (fault || refused) return fault ?? refused;
  if (!result) return "";
  if (result.reason) return signs(result.reason.say);
  const [best] = result.solutions ?? [];
  const all = [...(best?.findings ?? []), ...(result.findings ?? [])];
  const findings = all.filter((one) => !STATES.has(one.name));
  const told = [stateOf(best), ...findings.map((finding) => finding.say)].filter(Boolean);
  if (!best?.findings && result.code === OUTSIDE_WORK) told.push(WORDS.reach.list.outside_work);
  return signs(told.join("; "));
}

/** How near to singular a posture is, in words. @param {{state: string, kinds: string[]}} singularity */
export const stateSaid = ({ state, kinds }) =>
  say(WORDS.reach.target.states[state] ?? state, { kinds: kinds?.join(", ") ?? "" });

/** A share of travel left, in hundredths; null where an arm has no travel. */
export function percent(margin) {
  return margin === null ? WORDS.reach.list.unbounded : `${number(100 * margin, 1)}\u00a0%`;
}

const focusable = (table) => (table.at >= 0 ? table.at : sifted(table)[table.page * PAGE] ?? 0);

function choose(table, at, isPointed) {
  if (at === table.at) return;
  table.at = at;
  for (const key of table.place.querySelectorAll(".choice")) {
    const own = Number(key.dataset.at) === at;
    setAttribute(key, "aria-pressed", String(own));
    setAttribute(key, "tabindex", own ? "0" : "-1");
    setAttribute(key.closest("tr"), "aria-current", own ? "true" : null);
  }
  table.chosen(at, isPointed);
}

/** Arrow keys go from place to place, over the ends of pages too. */
function step(table, event) {
  const by = { ArrowDown: 1, ArrowUp: -1, Home: -Infinity, End: Infinity }[event.key];
  if (!by || !event.target.classList.contains("choice")) return;
  event.preventDefault();
  const shown = sifted(table);
  const now = shown.indexOf(Number(event.target.dataset.at)) + by;
  const next = Math.min(Math.max(now, 0), shown.length - 1);
  if (Math.floor(next / PAGE) !== table.page && !table.isWhole) {
    table.page = Math.floor(next / PAGE);
    draw(table);
  }
  choose(table, shown[next], false);
  table.place.querySelector(`.choice[data-at="${shown[next]}"]`)?.focus();
}

function pages(table, first, count) {
  const words = WORDS.reach.list;
  const turn = (by, text, ends) => el("button", {
    type: "button", disabled: ends,
    onclick() {
      table.page += by;
      draw(table);
      table.place.scrollIntoView({ block: "start" });
    },
  }, text);
  const last = Math.min(first + PAGE, count);
  return el("p", { class: "keys" }, turn(-1, words.before, first === 0),
    el("span", { class: "figures" },
      say(words.part, { first: counted(first + 1), last: counted(last), count: counted(count) })),
    turn(1, words.after, last === count));
}
