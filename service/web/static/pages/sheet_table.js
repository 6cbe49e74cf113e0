// The table of an arm and its revisions, and what changed between two of them, in words.
// Idea: two documents are taken apart to paths and values; what differs is listed.
// Left out: what a change does to poses; the service answers that for either revision.
import { ask } from "./ask.js";
import { choose, chosen } from "./address.js";
import { el, fill } from "./elements.js";
import { say, WORDS } from "./words.js";

const COLUMNS = [
  "joint", "a", "alpha", "d", "theta", "direction", "couplings", "travel", "working_travel", "working_reason",
  "top_speed"];

/** Show the table and what stands round it. @param {HTMLElement} place @param {object} stored */
export function showTable(place, { arm, units }) {
  const used = COLUMNS.filter((name) => arm.rows.some((row) => row[name] !== undefined && row[name] !== ""));
  const words = WORDS.sheet.columns;
  fill(place,
    el("p", {}, say(WORDS.sheet.table_says, { convention: arm.convention, units })),
    el("div", { class: "wide", tabindex: "0", role: "region", "aria-label": WORDS.sheet.table },
      el("table", { class: "ruled" },
        el("thead", {}, el("tr", {}, el("th", { scope: "col" }, words.row),
          used.map((name) => el("th", { scope: "col" }, words[name])))),
        el("tbody", {}, arm.rows.map((row, i) =>
          el("tr", {}, el("th", { scope: "row" }, row.passive ? say(WORDS.sheet.passive, { row: i + 1 }) : i + 1),
            used.map((name) => el("td", {}, cell(row[name])))))))),
    arm.notes ? el("p", { class: "notes" }, arm.notes) : null);
}

function cell(value) {
  if (value === undefined || value === null) return "";
  if (Array.isArray(value)) return value.map((one) =>
    (typeof one === "object" ? `${one.ratio} × ${one.axis}` : cell(one))).join(" … ");
  return typeof value === "number" ? String(value).replace("-", "−") : value;
}

/** Show the revisions of an arm, and a comparison of two that the address keeps. */
export async function showRevisions(place, path) {
  const { ok, data, problem } = await ask(`${path}/revisions`);
  if (!ok) return fill(place, el("p", {}, problem.detail));
  const known = data.revisions, numbers = known.map((one) => String(one.revision)).sort((a, b) => a - b);
  const picked = chosen({ was: numbers.at(-2) ?? numbers[0], is: numbers.at(-1) });
  const changes = el("div", { role: "status" });
  const select = (name) => el("select", { id: `revision-${name}`, onchange(event) {
    picked[name] = event.target.value;
    choose(picked);
    compare(changes, path, picked);
  } }, numbers.map((one) => el("option", { value: one, selected: one === picked[name] }, one)));
  const words = WORDS.sheet;
  fill(place,
    el("div", { class: "wide", tabindex: "0", role: "region", "aria-label": words.revisions },
      el("table", { class: "ruled" },
        el("thead", {}, el("tr", {}, [words.revision, words.time, words.author, words.why, words.digest].map(
          (one) => el("th", { scope: "col" }, one)))),
        el("tbody", {}, known.map((one) => el("tr", {}, el("th", { scope: "row" }, one.revision),
          [one.created_at.slice(0, 16).replace("T", " "), one.author, one.reason, one.digest].map(
            (text) => el("td", {}, text))))))),
    numbers.length > 1
      ? el("p", { class: "compare" }, el("label", { for: "revision-was" }, words.was), select("was"),
        el("label", { for: "revision-is" }, words.is), select("is"))
      : el("p", {}, words.one_revision),
    changes);
  if (numbers.length > 1) compare(changes, path, picked);
}

async function compare(place, path, { was, is }) {
  const [before, after] = await Promise.all([was, is].map((one) => ask(`${path}/revisions/${one}`)));
  const refused = before.problem ?? after.problem;
  if (refused) return fill(place, el("p", {}, refused.detail));
  const found = differences(before.data.arm, after.data.arm);
  if (!found.length) return fill(place, el("p", {}, WORDS.sheet.no_change));
  fill(place, el("table", { class: "changes" },
    el("thead", {}, el("tr", {}, [WORDS.sheet.what, was, is].map((one) => el("th", { scope: "col" }, one)))),
    el("tbody", {}, found.map(([what, one, other]) =>
      el("tr", {}, el("th", { scope: "row" }, what), el("td", {}, one), el("td", {}, other))))));
}

/**
 * Return what differs between two documents: path in words, value before, value after.
 * @param {any} was @param {any} is @returns {string[][]}
 */
function differences(was, is, where = []) {
  const isTree = (one) => one !== null && typeof one === "object"
    && !(Array.isArray(one) && one.every((part) => typeof part !== "object"));
  if (!isTree(was) || !isTree(is)) {
    const [one, other] = [was, is].map((value) => (value === undefined ? WORDS.sheet.absent
      : Array.isArray(value) ? value.map(cell).join(", ") : String(cell(value))));
    return one === other ? [] : [[inWords(where), one, other]];
  }
  const names = [...new Set([...Object.keys(was), ...Object.keys(is)])];
  return names.flatMap((name) => differences(was[name], is[name], [...where, name]));
}

const inWords = (where) =>
  where.map((part) => (/^\d+$/.test(part) ? String(Number(part) + 1) : part.replaceAll("_", " "))).join(" ");
