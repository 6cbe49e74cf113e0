// The table of an arm and its revisions, and what changed between two of them, in words.
// Idea: two documents are taken apart to paths and values; what differs is listed.
// Left out: what a change does to poses; the service answers that for either revision.
import { ask } from "./ask.js";
import { choose, chosen } from "./address.js";
import { el, fill, options } from "./elements.js";
import { say, WORDS } from "./words.js";

const COLUMNS = [
  "joint", "a", "alpha", "d", "theta", "travel", "working_travel", "working_reason", "top_speed"];
const MOVED = { revolute: "theta", prismatic: "d" };

/**
 * Show the table, how it is read, and what stands round it.
 * @param {HTMLElement} place @param {object} stored
 */
export function showTable(place, { arm, units }) {
  const words = WORDS.sheet, joints = jointsOf(arm.rows);
  const used = COLUMNS.filter((name) => arm.rows.some((row) => row[name] !== undefined && row[name] !== ""));
  const part = (row, i, name) =>
    (name === MOVED[row.joint] ? variable(arm.rows, i, joints) : cell(row[name]));
  const rowOf = (row, i) => el("tr", {},
    el("th", { scope: "row" }, row.passive ? say(words.passive, { row: i + 1 }) : i + 1),
    used.map((name) => el("td", {}, part(row, i, name))));
  const { convention } = arm;
  fill(place,
    el("p", {}, say(words.table_says, { convention, units }), " ", words[`read_${convention}`]),
    ruled(words.table, ["row", ...used].map((name) => words.columns[name]), arm.rows.map(rowOf)),
    el("p", {}, words.variables),
    standing(arm),
    arm.notes ? el("p", { class: "notes" }, arm.notes) : null);
}

const ruled = (name, heads, rows) =>
  el("div", { class: "wide", tabindex: "0", role: "region", "aria-label": name },
    el("table", { class: "ruled" },
      el("thead", {}, el("tr", {}, heads.map((one) => el("th", { scope: "col" }, one)))),
      el("tbody", {}, rows)));

/** The number of the joint value that belongs to each row; none of a passive one. */
function jointsOf(rows) {
  let count = 0;
  return rows.map((row) => (row.passive ? null : ++count));
}

/** What a row's moving parameter is, as a sum: its offset and the joint values that take part. */
function variable(rows, i, joints) {
  const row = rows[i], offset = row[MOVED[row.joint]] ?? 0;
  const terms = row.passive ? [] : [[row.direction ?? 1, joints[i]]];
  for (const { axis, ratio } of row.couplings ?? []) terms.push([ratio, joints[axis - 1]]);
  const written = terms.map(([by, joint]) =>
    `${by < 0 ? "−" : "+"} ${Math.abs(by) === 1 ? "" : `${Math.abs(by)} `}q${joint}`).join(" ");
  if (offset || !written) return `${cell(offset)} ${written}`;
  return written.replace(/^\+ /, "").replace(/^− /, "−");
}

/** Base, tools and frames: what each stands in, and where, as it was stored. */
function standing({ base, tools, frames }) {
  const words = WORDS.sheet;
  const all = [
    ...(base ? [["base", { in: "world", ...base }]] : []),
    ...Object.entries(tools ?? {}).map(([name, one]) => [name, { ...one, in: "flange" }]),
    ...Object.entries(frames ?? {})];
  if (!all.length) return null;
  const turned = ({ orientation: { form, values } }) => `${values.flat().map(cell).join(", ")} (${form})`;
  return ruled(words.standing, words.standing_columns, all.map(([name, one]) =>
    el("tr", {}, el("th", { scope: "row" }, name), el("td", {}, one.number), el("td", {}, one.in),
      el("td", {}, one.position.map(cell).join(", ")), el("td", {}, turned(one)))));
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
  } }, options(numbers, picked[name]));
  const words = WORDS.sheet;
  fill(place,
    ruled(words.revisions, [words.revision, words.time, words.author, words.why, words.digest],
      known.map((one) => el("tr", {}, el("th", { scope: "row" }, one.revision),
        [one.created_at.slice(0, 16).replace("T", " "), one.author, one.reason, one.digest].map(
          (text) => el("td", {}, text))))),
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
  const isAbsent = (one) => one === undefined;
  // What is new or gone as a whole is told part by part.
  if (isAbsent(was) !== isAbsent(is) && isTree(was ?? is)) return differences(was ?? {}, is ?? {}, where);
  if (!isTree(was) || !isTree(is)) {
    const [one, other] = [was, is].map((value) => (isAbsent(value) ? WORDS.sheet.absent
      : Array.isArray(value) ? value.map(cell).join(", ") : String(cell(value))));
    return one === other ? [] : [[inWords(where), one, other]];
  }
  const names = [...new Set([...Object.keys(was), ...Object.keys(is)])];
  return names.flatMap((name) => differences(was[name], is[name], [...where, name]));
}

const inWords = (where) =>
  where.map((part) => (/^\d+$/.test(part) ? String(Number(part) + 1) : part.replaceAll("_", " "))).join(" ");
