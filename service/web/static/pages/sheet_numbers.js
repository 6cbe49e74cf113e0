// The numbers of a sheet: where the tool is, what is to be said of it, and the same as text to take away.
// Idea: what cannot be relied on is taken off the sheet, not dimmed. Left out: the drawing.
import { ask } from "./ask.js";
import { withQuery } from "./address.js";
import { el, fill, setAttribute, setText } from "./elements.js";
import { age, angle, length, number, signs, unitsOf } from "./numbers.js";
import { say, WORDS } from "./words.js";

const TRIPLE = /^([xyz]{3})-(fixed|current)$/;
const SINGULAR = 2; // Codes 1 and 2 say near and singular.
const PRIMES = ["", "′", "″"];

/** How the state of an answer is called, by its reason where that has a word of its own. */
export const stateWord = (state, reason) =>
  WORDS.sheet[`state_${reason}`] ?? WORDS.sheet[`state_${state}`] ?? state;

/** Return the names of an orientation's numbers, as the trade writes them: z, y′, x″. */
function namesOf(form) {
  const triple = TRIPLE.exec(form);
  if (triple) return [...triple[1]].map((axis, i) => axis + (triple[2] === "current" ? PRIMES[i] : ""));
  return {
    "quaternion-wxyz": ["w", "x", "y", "z"], "quaternion-xyzw": ["x", "y", "z", "w"],
    "rotation-vector": ["x", "y", "z"] }[form] ?? [];
}

/** Return what shows the numbers of an answer in a place of the page. */
export function readings(place) {
  const state = { place, cells: [], key: "" };
  return { show: (answer, isRelied) => showNumbers(state, answer, isRelied) };
}

function showNumbers(state, answer, isRelied) {
  const { position, orientation } = answer.poses[0], { units } = answer;
  const isAngle = TRIPLE.test(orientation.form) || orientation.form === "rotation-vector";
  const turn = (value) => (isAngle ? angle(value, units) : number(value, 5));
  const { length: lengthUnit, angle: angleUnit } = unitsOf(units);
  const key = `${orientation.form} ${units}`;
  if (key !== state.key) {
    state.key = key;
    state.cells = [...position, ...orientation.values.flat()].map(() => el("output", {}));
    const names = namesOf(orientation.form), turns = state.cells.slice(3);
    const row = (name, cell, unit) =>
      el("div", {}, el("span", { class: "of" }, name), cell, el("span", { class: "unit" }, unit));
    fill(state.place,
      el("div", { class: "position" },
        ["x", "y", "z"].map((axis, i) => row(axis, state.cells[i], lengthUnit))),
      names.length
        ? el("div", { class: "orientation" }, names.map((name, i) =>
          row(isAngle ? say(WORDS.sheet.about, { axis: name }) : name, turns[i], isAngle ? angleUnit : "")))
        : el("div", { class: "orientation matrix" }, turns));
  }
  const written = [...position.map((value) => length(value, units)), ...orientation.values.flat().map(turn)];
  written.forEach((text, i) => setText(state.cells[i], isRelied ? text : WORDS.shell.none));
}

/**
 * Return the sentences on what matters, the gravest first. The page's own sentence on singularity holds
 * all that the finding of that code says, but for the bare measure.
 * @param {object} answer nested, of a pose or a live pose
 */
export function sentences(answer) {
  const { singularity, findings } = answer.poses[0];
  const graver = findings.filter((one) => one.code > SINGULAR || !singularity).map((one) => one.say);
  const lost = singularity?.lost_motion.map((one) => one.say) ?? [];
  return [answer.say, ...graver, ...(singularity ? [onSingularity(singularity)] : []), ...lost]
    .filter(Boolean).map(signs);
}

function onSingularity({ state, kinds, joints, condition_number: condition, travel_to: to }) {
  const who = { kinds: kinds.join(", "), joints: joints.join(", ") };
  const named = kinds.length && joints.length ? say(WORDS.sheet.of_kinds, who) : "";
  const values = {
    state: WORDS.sheet[state] + named, condition: condition === null ? "∞" : number(condition, 1) };
  const near = to ? { joint: to.joint, value: number(Math.abs(to.value), 1), unit: to.unit } : null;
  return say(WORDS.sheet.singularity, values) + (near ? ` ${say(WORDS.sheet.travel_to, near)}` : "");
}

/** Say how far an answer can be relied on: the state's word, age, and whether anything stands there. */
export function showState(place, { state, word, ageMs, simulated }) {
  setAttribute(place, "data-state", state);
  const parts = place.querySelectorAll("span");
  setText(parts[0], word);
  setText(parts[1], ageMs === null ? ""
    : say(state === "bad" ? WORDS.sheet.last : WORDS.sheet.age, { age: age(ageMs) }));
  setText(parts[2], simulated ? WORDS.sheet.simulated : "");
}

/**
 * Return what shows the same numbers as texts: address, a controller's line, JSON; each with a key to
 * copy it.
 * @param {HTMLElement} place
 */
export function texts(place) {
  const said = el("p", { class: "unseen", role: "status" });
  const shown = Object.fromEntries(["address", "line", "json"].map((name) =>
    [name, el("pre", { tabindex: "0", "aria-label": WORDS.sheet[name] })]));
  fill(place, Object.entries(shown).map(([name, text]) =>
    el("div", { class: "text" }, el("h3", {}, WORDS.sheet[name]),
      el("button", {
        type: "button", "aria-label": say(WORDS.sheet.copy_of, { what: WORDS.sheet[name] }),
        onclick: (event) => copied(event.target, text, said) }, WORDS.sheet.copy), text)), said);
  return { show: (path, parameters) => showTexts(shown, path, parameters) };
}

async function showTexts(shown, path, parameters) {
  const form = TRIPLE.test(parameters.form ?? "") ? parameters.form : null;
  const line = withQuery(path, { ...parameters, form, format: "txt" }), json = withQuery(path, parameters);
  setText(shown.address, `${location.origin}${json}\n${location.origin}${line}`);
  const [asLine, asJson] = await Promise.all([ask(line), ask(json)]);
  setText(shown.line, typeof asLine.data === "string" ? asLine.data.trimEnd() : asLine.problem.detail);
  setText(shown.json, asJson.data ? JSON.stringify(asJson.data, null, 1) : asJson.problem.detail);
}

async function copied(button, text, said) {
  const done = await copy(text);
  setText(said, done ? WORDS.sheet.copied : WORDS.sheet.not_copied);
  setText(button, done ? WORDS.sheet.copied : WORDS.sheet.not_copied);
  setTimeout(() => setText(button, WORDS.sheet.copy), 1500);
}

/** Plants serve by plain HTTP, where browsers have no clipboard for scripts: then by selection. */
async function copy(text) {
  try {
    await navigator.clipboard.writeText(text.textContent);
    return true;
  } catch {
    getSelection().selectAllChildren(text);
    return document.execCommand("copy");
  }
}

/** Return what writes sentences into a list, where they are others than there. */
export function notes(place) {
  let now = "";
  return (said) => {
    if (said.join("\n") === now) return;
    now = said.join("\n");
    fill(place, said.map((one) => el("li", {}, one)));
  };
}
