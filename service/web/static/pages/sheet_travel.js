// The stepping table: each joint value with its travel as a ruled scale; typed, nudged, or as it comes.
// Idea: the same table shows what comes live and takes what is typed: whoever types or nudges goes on
// by hand from there. Left out: what is beyond travel, which the answer says in words.
import { el, fill, options, setAttribute, setText, svg } from "./elements.js";
import { DECIMALS, number, signs, typed } from "./numbers.js";
import { say, WORDS } from "./words.js";

const STEPS = ["0.01", "0.1", "1", "10", "100"];

/**
 * Return a table in a place of the page.
 * @param {HTMLElement} place @param {HTMLSelectElement} step
 * @param {{values: (values: string[]) => void, joint: (joint: number|null) => void}} told
 *     values: what was typed or nudged; joint: whose row is pointed at or has the focus
 */
export function travelTable(place, step, told) {
  fill(step, options(STEPS, "1"));
  const body = el("tbody"), state = { rows: [], key: "", byHand: false, told, step, body };
  fill(place,
    el("table", { class: "travel" }, el("caption", { class: "unseen" }, WORDS.sheet.travel),
      el("thead", {}, el("tr", {}, WORDS.sheet.travel_columns.map((one) => el("th", { scope: "col" }, one)))),
      body));
  return {
    show: (travel, byHand, isRelied) => show(state, travel, byHand, isRelied),
    wrong: (index) => state.rows.filter((row) => row.joint !== null).forEach((row, i) =>
      setAttribute(row.field, "aria-invalid", i === index ? "true" : null)),
  };
}

function show(state, travel, byHand, isRelied) {
  const key = travel.map((one) => one.of + one.unit).join();
  if (key !== state.key) {
    state.key = key;
    state.rows = travel.map((one) => rowOf(state, one));
    fill(state.body, state.rows.map((row) => row.element));
  }
  state.byHand = byHand;
  travel.forEach((one, i) => update(state.rows[i], one, byHand, isRelied));
}

const valuesOf = (state) => state.rows.filter((row) => row.joint !== null).map((row) => row.field.value);

function rowOf(state, one) {
  if (one.joint === null) return boundOf(one);
  const name = say(WORDS.sheet.joint, { joint: one.joint });
  const decimals = DECIMALS[one.unit] ?? 3, row = { joint: one.joint, scale: scaleOf(decimals), decimals };
  const changed = () => state.told.values(valuesOf(state));
  const point = () => state.told.joint(one.joint);
  const leave = () => state.told.joint(
    state.rows.find((other) => other.element.contains(document.activeElement))?.joint ?? null);
  const nudge = (by) => {
    const now = typed(row.field.value);
    if (!Number.isFinite(now)) return;
    row.field.value = String(Number((now + by * Number(state.step.value)).toFixed(9))).replace("-", "−");
    changed();
  };
  row.field = el("input", {
    inputmode: "decimal", autocomplete: "off", "aria-label": `${name}, ${one.unit}`,
    oninput: changed,
    onkeydown(event) {
      const by = { ArrowUp: 1, ArrowDown: -1 }[event.key];
      if (!by) return;
      event.preventDefault();
      nudge(by * (event.shiftKey ? 10 : 1));
    } });
  const press = (by, sign) => el("button", {
    type: "button", "aria-label": say(WORDS.sheet[sign], { name }), onclick: () => nudge(by),
  }, by < 0 ? "−" : "+");
  const following = { onpointerenter: point, onfocusin: point, onpointerleave: leave, onfocusout: leave };
  row.element = el("tr", following,
    el("th", { scope: "row" }, el("span", { class: "balloon" }, one.joint)),
    el("td", { class: "value" }, row.field, el("span", { class: "unit" }, one.unit)),
    el("td", { class: "nudge" }, press(-1, "minus"), press(1, "plus")),
    el("td", { class: "used" }, row.scale.element));
  return row;
}

/** What is bounded beside the joints, a passive row or a sum: shown alike, but nobody can set it. */
function boundOf(one) {
  const decimals = DECIMALS[one.unit] ?? 3;
  const row = { joint: null, scale: scaleOf(decimals), decimals, field: el("output", {}) };
  row.element = el("tr", {},
    el("th", { scope: "row", colspan: 3 }, signs(one.of), " ", row.field, " ", one.unit),
    el("td", { class: "used" }, row.scale.element));
  return row;
}

function update(row, one, byHand, isRelied) {
  const text = isRelied ? number(one.value, row.decimals) : WORDS.shell.none;
  row.element.classList.toggle("struck", !isRelied);
  const isTyping = byHand && (document.activeElement === row.field || row.byHand);
  if (!isTyping && row.field.value !== text) row.field.value = text;
  row.byHand = byHand;
  row.scale.show(one);
}

/** A scale from stop to stop: working travel thick on it, a mark where the value stands. */
function scaleOf(decimals) {
  const at = (share) => `${(4 + 92 * Math.min(Math.max(share, -0.03), 1.03)).toFixed(2)}%`;
  const working = svg("line", { class: "working", y1: "45%", y2: "45%" });
  const mark = svg("svg", { y: "45%", overflow: "visible" },
    svg("path", { class: "mark", d: "M0 -2 L-5 -12 L5 -12 Z" }));
  const zero = svg("line", { class: "zero", y1: "33%", y2: "57%" });
  const ends = [
    svg("text", { x: "4%", y: "100%" }), svg("text", { x: "96%", y: "100%", "text-anchor": "end" })];
  const ruled = svg("g", {},
    svg("line", { x1: "4%", x2: "96%", y1: "45%", y2: "45%" }), zero, working,
    ["4%", "96%"].map((x) => svg("line", { class: "stop", x1: x, x2: x, y1: "22%", y2: "68%" })), mark, ends);
  const none = el("span", { class: "quiet" }, WORDS.sheet.unbounded);
  const drawn = svg("svg", { class: "scale", "aria-hidden": "true" }, ruled);
  let told = "";
  const show = ({ share, travel, working_travel: inner }) => {
    const key = JSON.stringify([travel, inner]);
    if (key !== told) {
      told = key;
      drawn.toggleAttribute("hidden", !travel);
      none.toggleAttribute("hidden", Boolean(travel));
      if (!travel) return;
      const on = (value) => at((value - travel[0]) / (travel[1] - travel[0]));
      const isRound = (end) => Math.abs(end - Math.round(end)) < 1e-6;
      travel.forEach((end, i) => setText(ends[i], number(end, isRound(end) ? 0 : decimals)));
      working.toggleAttribute("hidden", !inner);
      if (inner) inner.forEach((end, i) => setAttribute(working, `x${i + 1}`, on(end)));
      const inside = travel[0] < 0 && travel[1] > 0;
      zero.toggleAttribute("hidden", !inside);
      if (inside) for (const x of ["x1", "x2"]) setAttribute(zero, x, on(0));
    }
    if (!travel) return;
    setAttribute(mark, "x", at(share));
    setAttribute(drawn, "class", share < 0 || share > 1 ? "scale beyond" : "scale");
  };
  return { element: el("div", {}, drawn, none), show };
}
