// The chosen place: verdict, reason, what the answer rests on, and its solutions one by one.
// Idea: the place is asked again alone, so that all solutions come with approach and families.
// Left out: the drawing, and asking.

import { withQuery } from "./address.js";
import { el, fill } from "./elements.js";
import { angle, length, number, unitsOf } from "./numbers.js";
import { percent, said, sign, verdictOf } from "./reach_list.js";
import { say, WORDS } from "./words.js";

/**
 * Return what shows the chosen place.
 * @param {HTMLElement} place
 * @param {(solution: object | null) => void} stepped called with the solution that is looked at
 */
export function targetDesk(place, stepped) {
  const desk = { place, stepped, now: 0, shown: null };
  place.addEventListener("keydown", (event) => {
    const by = { ArrowLeft: -1, ArrowRight: 1 }[event.key];
    if (by && event.target.closest(".stepping")) step(desk, by);
  });
  return (shown) => {
    Object.assign(desk, { shown, now: 0 });
    draw(desk);
  };
}

/**
 * @typedef {{arm: object, row: object, name: string, question: object, method: string, waits: boolean}} Shown
 */

function draw(desk) {
  const { shown } = desk;
  if (!shown) return fill(desk.place);
  const { row, name } = shown, verdict = verdictOf(row), words = WORDS.reach.target;
  const solutions = row.result?.solutions ?? [];
  fill(desk.place,
    el("h2", {}, sign(verdict), ` ${name}`),
    el("p", { class: "verdict" }, el("b", {}, WORDS.reach.verdicts[verdict] ?? verdict),
      said(row) ? `: ${said(row)}` : ""),
    row.result?.proof ? el("p", { class: "quiet" }, say(words.rests, {
      proof: words.proofs[row.result.proof] ?? row.result.proof, method: shown.method })) : null,
    nearestOf(shown), ...familiesOf(shown),
    solutions.length ? stepping(desk, solutions) : null,
    el("div", { class: "solution" }),
  );
  look(desk);
}

/** The nearest pose that can be reached, as numbers to take over. */
function nearestOf({ row, question }) {
  const near = row.result?.reason?.nearest;
  if (!near) return null;
  const values = [
    near.position.map((one) => length(one, question.units)),
    near.orientation.values.flat().map((one) => angle(one, question.units))];
  return el("p", {}, WORDS.reach.target.nearest, " ", el("span", { class: "figures" }, values.flat().join("  ")),
    ` (${near.orientation.form})`);
}

function familiesOf({ row }) {
  return (row.result?.families ?? []).map((family) => el("p", { class: "quiet" }, say(WORDS.reach.target.family, {
    joints: family.free_joints.join(", "), unit: family.unit,
    from: number(family.interval[0][0], 1), to: number(family.interval.at(-1)[1], 1),
  }), family.relation ? ` ${family.relation}` : ""));
}

function stepping(desk, solutions) {
  const words = WORDS.reach.target;
  const key = (by, text) => el("button", {
    type: "button", "aria-label": by < 0 ? words.before : words.after, disabled: solutions.length < 2,
    onclick: () => step(desk, by) }, text);
  return el("div", { class: "stepping keys", role: "group", "aria-label": words.step },
    key(-1, "\u25c0"), el("output", { "aria-live": "polite" }), key(1, "\u25b6"));
}

function step(desk, by) {
  const count = desk.shown.row.result.solutions.length;
  desk.now = (desk.now + by + count) % count;
  look(desk);
}

/** Show one solution, and tell the drawing. */
function look(desk) {
  const { shown, now, place } = desk;
  const solutions = shown.row.result?.solutions ?? [];
  const solution = solutions[now] ?? null;
  if (solution) {
    const count = shown.waits ? WORDS.reach.target.more : solutions.length;
    place.querySelector("output").textContent = say(WORDS.reach.target.solution, { number: now + 1, count });
    fill(place.querySelector(".solution"), ...solutionLines(shown, solution));
  }
  desk.stepped(solution);
}

function solutionLines({ arm, question, name }, solution) {
  const words = WORDS.reach.target, { units } = question;
  const rows = arm.arm.rows.filter((row) => !row.passive);
  const kinds = rows.map((row) => (row.joint === "prismatic" ? length : angle));
  const q = solution.joints.join(",");
  const sheet = withQuery(`/arms/${encodeURIComponent(arm.name)}`, {
    q, tool: question.tool, frame: question.frame, units });
  const { singularity } = solution, state = singularity?.state ?? solution.state;
  return [
    el("table", { class: "joints" }, el("caption", { class: "unseen" }, say(words.joints, { name })),
      el("tr", {}, solution.joints.map((value, i) => el("th", { scope: "col" }, i + 1))),
      el("tr", {}, solution.joints.map((value, i) => el("td", { class: "figures" }, kinds[i](value, units))))),
    el("p", {}, say(words.margin, { margin: percent(solution.margin) }), solution.branch ? `; ${solution.branch}` : ""),
    state ? el("p", {}, say(words.states[state] ?? state, { kinds: singularity?.kinds?.join(", ") ?? "" }),
      (singularity?.lost_motion ?? []).map((lost) => `; ${lost.say}`)) : null,
    ...(solution.findings ?? []).filter((finding) => finding.name !== "near-singular")
      .map((finding) => el("p", {}, finding.say)),
    approachLine(solution.approach, units),
    el("p", { class: "keys" }, copyKey(q), el("a", { href: sheet }, words.sheet)),
  ];
}

function approachLine(approach, units) {
  if (!approach) return null;
  const words = WORDS.reach.target;
  if (!approach.ok) return el("p", {}, el("b", {}, words.approach), " ", approach.breaks?.say ?? words.breaks);
  return el("p", {}, el("b", {}, words.approach), " ", say(words.comes, {
    length: length(approach.length, units), unit: unitsOf(units).length,
    margin: percent(approach.margin?.value ?? null),
  }));
}

function copyKey(text) {
  const words = WORDS.reach.target;
  const key = el("button", {
    type: "button",
    async onclick() {
      const isCopied = await navigator.clipboard?.writeText(text).then(() => true, () => false);
      key.textContent = isCopied ? words.copied : text;
    },
  }, words.copy);
  return key;
}
