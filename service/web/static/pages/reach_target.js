// The chosen place: verdict, reason, what the answer rests on, and its solutions one by one.
// Idea: the place is asked again alone, so that all solutions come with approach and families.
// Left out: the drawing, and asking.

import { withQuery } from "./address.js";
import { el, fill } from "./elements.js";
import { angle, length, number, signs, unitsOf } from "./numbers.js";
import { kindOf, nameOf, percent, said, sign, stateSaid, verdictOf } from "./reach_list.js";
import { say, WORDS } from "./words.js";

const MOST_FAMILIES = 4;    // As many as can be taken in.

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

/** Shown: arm, row, question, method; waits: more solutions may come; trouble: why none came. */
function draw(desk) {
  const { shown } = desk;
  if (!shown) return fill(desk.place);
  const { row } = shown, kind = kindOf(row), words = WORDS.reach.target;
  const solutions = row.result?.solutions ?? [];
  fill(desk.place,
    el("h2", {}, sign(kind), ` ${nameOf(row)}`),
    el("p", { class: "verdict", dataset: { kind } }, el("b", {}, verdictOf(row)),
      said(row) ? `: ${said(row)}` : ""),
    shown.trouble ? el("p", { class: "refused" }, say(words.trouble, { say: shown.trouble })) : null,
    row.result?.proof ? el("p", { class: "quiet" },
      say(words.rests, { proof: words.proofs[row.result.proof] ?? row.result.proof }),
      shown.method ? say(words.method, { method: signs(shown.method) }) : "") : null,
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
  const { met, nearest } = WORDS.reach.target, { form, values } = near.orientation, { verdict } = row.result;
  // Where travel alone is in the way the links get there: that is no other place.
  if (verdict === "outside-travel") return null;
  const figures = near.position.map((one) => length(one, question.units));
  // In another form than that of the list it would be misread: then it was not asked for.
  const isTurned = form === question.form;
  if (isTurned) figures.push(...values.flat().map((one) => angle(one, question.units)));
  return el("p", {}, verdict === "not-found" ? met : nearest, " ",
    el("span", { class: "figures" }, figures.join("  ")), isTurned ? ` (${form})` : "");
}

function familiesOf({ row }) {
  const words = WORDS.reach.target;
  const told = ({ free_joints: joints, interval, unit, relation }) => [
    say(joints.length === 1 ? words.family_one : words.family, {
      joints: joints.join(", "), unit, from: number(interval[0][0], 1), to: number(interval.at(-1)[1], 1),
    }), relation ? signs(relation) : ""].join(" ");
  // Postures on different branches may move on in the same words.
  const all = [...new Set((row.result?.families ?? []).map(told))];
  const rest = all.length - MOST_FAMILIES;
  const shown = all.slice(0, MOST_FAMILIES).concat(rest > 0 ? say(words.families_more, { count: rest }) : []);
  return shown.length ? [el("ul", { class: "quiet families" }, shown.map((text) => el("li", {}, text)))] : [];
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
    const words = WORDS.reach.target, { found } = shown.row.result;
    place.querySelector("output").textContent = !shown.waits && solutions.length === 1 && found > 1
      ? say(words.best, { count: found })
      : say(words.solution, { number: now + 1, count: shown.waits ? words.more : solutions.length });
    fill(place.querySelector(".solution"), ...solutionLines(shown, solution));
  }
  desk.stepped(solution);
}

function solutionLines({ arm, question, row }, solution) {
  const words = WORDS.reach.target, { units } = question;
  const rows = arm.arm.rows.filter((row) => !row.passive);
  const kinds = rows.map((row) => (row.joint === "prismatic" ? length : angle));
  const q = solution.joints.join(",");
  const sheet = withQuery(`/arms/${encodeURIComponent(arm.name)}`, {
    q, tool: question.tool, frame: question.frame, units });
  const { singularity } = solution;
  const findings = (solution.findings ?? []).filter((one) => !/(^|-)singular$/.test(one.name));
  const each = (cell) => el("tr", {}, solution.joints.map(cell));
  return [
    el("table", { class: "joints" },
      el("caption", { class: "unseen" }, say(words.joints, { name: nameOf(row) })),
      each((value, i) => el("th", { scope: "col" }, i + 1)),
      each((value, i) => el("td", { class: "figures" }, kinds[i](value, units)))),
    el("p", {}, [say(words.margin, { margin: percent(solution.margin) }), solution.branch]
      .filter(Boolean).join("; ")),
    singularity ? el("p", { dataset: { state: singularity.state } }, stateSaid(singularity),
      (singularity.lost_motion ?? []).map((lost) => `; ${signs(lost.say)}`)) : null,
    ...findings.map((finding) => el("p", {}, signs(finding.say))),
    approachLine(solution.approach, units),
    el("p", { class: "keys" }, copyKey(q), el("a", { href: sheet }, words.sheet)),
  ];
}

function approachLine(approach, units) {
  if (!approach) return null;
  const words = WORDS.reach.target;
  const breaks = signs(approach.breaks?.say ?? words.breaks);
  if (!approach.ok) return el("p", {}, el("b", {}, words.approach), " ", breaks);
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
