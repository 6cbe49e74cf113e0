// The table of places: what was read, verdict, reason; counts to sift by; a hundred on a page.
// Idea: one line for each line of the list, in its order, from the moment it is read; a verdict is
// told by a mark, a word and a sentence. Left out: asking, and all about the chosen place.

import { el, fill, setAttribute, svg } from "./elements.js";
import { length, number, unitsOf } from "./numbers.js";
import { counted } from "./reach_survey.js";
import { say, WORDS } from "./words.js";

const PAGE = 100;
/** Verdicts in the order of their counts, with the sign each has here and on the drawing. */
export const SIGNS = {
  reachable: "M5 10a5 5 0 1 0 10 0a5 5 0 1 0 -10 0M9.5 10h1",
  "outside-travel": "M10 4L16 15H4Z",
  unreachable: "M5 5L15 15M15 5L5 15",
  "not-found": "M10 3L17 10L10 17L3 10Z",
  refused: "M4 10H16",
};

/**
 * @typedef {{place: object|null, fault: string|null, result: object|null, refused: string|null}} Row
 * `place` as read, or the fault of its line in words; `result` as answered.
 */

/** The verdict of a row; "unread" for a line that cannot be read, "open" before the answer. */
export function verdictOf({ fault, refused, result }) {
  if (fault) return "unread";
  if (refused) return "refused";
  return result ? result.verdict ?? "refused" : "open";
}

/**
 * Return the table in a place of the page.
 * @param {HTMLElement} place @param {(at: number) => void} chosen called with the number of a row
 */
export function placesTable(place, chosen) {
  const table = { place, chosen, rows: [], units: "mm-deg", page: 0, sift: "", at: -1 };
  place.addEventListener("keydown", (event) => step(table, event));
  return {
    show(rows, units) {
      Object.assign(table, { rows, units, page: 0, sift: "", at: -1 });
      draw(table);
    },
    choose: (at) => choose(table, at),
    whole(isWhole) {
      table.isWhole = isWhole;
      draw(table);
    },
  };
}

function draw(table) {
  const words = WORDS.reach.list;
  if (!table.rows.length) return fill(table.place);
  const shown = sifted(table);
  const first = table.isWhole ? 0 : table.page * PAGE;
  const part = table.isWhole ? shown : shown.slice(first, first + PAGE);
  const heads = ["number", "name", "place", "verdict", "travel_left"];
  fill(
    table.place, counts(table),
    el("table", { class: "list" }, el("caption", { class: "unseen" }, words.caption),
      el("thead", {}, el("tr", {}, heads.map((head) =>
        el("th", { scope: "col", class: head }, head === "place" ? placeHead(table) : words[head])))),
      el("tbody", {}, part.map((at) => line(table, at)))),
    shown.length > PAGE ? pages(table, first, shown.length) : null,
  );
}

const placeHead = ({ units }) => say(WORDS.reach.list.place, { unit: unitsOf(units).length });

function sifted({ rows, sift }) {
  const all = rows.map((row, at) => at);
  return sift ? all.filter((at) => verdictOf(rows[at]) === sift) : all;
}

function counts(table) {
  const found = new Map();
  for (const row of table.rows) found.set(verdictOf(row), (found.get(verdictOf(row)) ?? 0) + 1);
  const names = ["reachable", "outside-travel", "unreachable", "not-found", "refused", "unread", "open"];
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
    names.filter((name) => found.has(name)).map((name) => key(name, found.get(name))));
}

/** The sign of a verdict. @param {string} verdict */
export function sign(verdict) {
  const path = SIGNS[verdict];
  return path
    ? svg("svg", { viewBox: "0 0 20 20", class: "sign", "aria-hidden": "true" }, svg("path", { d: path }))
    : null;
}

function line(table, at) {
  const { units } = table;
  const row = table.rows[at], { place, result } = row;
  const verdict = verdictOf(row);
  const margin = result?.solutions?.[0]?.margin;
  const label = place?.name ?? say(WORDS.reach.list.line, { line: place?.line ?? row.line });
  const key = el("button", {
    type: "button", class: "choice", dataset: { at }, "aria-pressed": String(at === table.at),
    "aria-label": say(WORDS.reach.list.show, { number: at + 1, name: label }),
    tabindex: at === focusable(table) ? 0 : -1,
    onclick: () => choose(table, at),
  }, label);
  return el("tr", {
    class: `is-${verdict}`, dataset: { at }, onclick: () => choose(table, at),
    "aria-current": at === table.at ? "true" : null },
    el("td", { class: "number" }, at + 1),
    el("th", { scope: "row" }, key),
    el("td", { class: "place figures" }, place ? place.position.map((one) => length(one, units)).join("  ") : ""),
    el("td", { class: "verdict" }, sign(verdict), el("b", {}, WORDS.reach.verdicts[verdict] ?? verdict), " ",
      el("span", {}, said(row))),
    el("td", { class: "travel_left figures" }, margin === undefined ? "" : percent(margin)));
}

/** The sentence of a row. @param {Row} row */
export function said({ fault, refused, result }) {
  if (fault || refused) return fault ?? refused;
  if (!result) return "";
  if (result.reason) return result.reason.say;
  const beyond = result.solutions?.[0]?.findings?.map((finding) => finding.say) ?? [];
  return beyond.concat((result.findings ?? []).map((finding) => finding.say)).join("; ");
}

/** A share of travel left, in hundredths; null where an arm has no travel. */
export function percent(margin) {
  return margin === null ? WORDS.reach.list.unbounded : `${number(100 * margin, 1)} %`;
}

const focusable = (table) => (table.at >= 0 ? table.at : sifted(table)[table.page * PAGE] ?? 0);

function choose(table, at) {
  if (at === table.at) return;
  table.at = at;
  for (const key of table.place.querySelectorAll(".choice")) {
    const own = Number(key.dataset.at) === at;
    setAttribute(key, "aria-pressed", String(own));
    setAttribute(key, "tabindex", own ? "0" : "-1");
    setAttribute(key.closest("tr"), "aria-current", own ? "true" : null);
  }
  table.chosen(at);
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
  choose(table, shown[next]);
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
