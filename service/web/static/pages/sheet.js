// The sheet of one arm: what is asked, of whom, and when; live, or by joint values typed or nudged.
// Idea: one answer of the interface at a time is shown everywhere; what the viewer chose stands in the
// address and in every question. Left out: drawing (sheet_views.js) and writing (other sheet modules).
import { ask, follow, refusal } from "./ask.js";
import { choose, chosen, withQuery } from "./address.js";
import { fill, options, setText } from "./elements.js";
import { FORMS, jointsIn, signs, typed, UNITS, unitsOf } from "./numbers.js";
import { back, begin, gone, isGone, onTheme, ready } from "./shell.js";
import { fixedFrames, framesIn, framesNear, isUpright, risingOf } from "./frames.js";
import { notes, readings, sentences, showState, stateWord, texts } from "./sheet_numbers.js";
import { showRevisions, showTable } from "./sheet_table.js";
import { travelTable } from "./sheet_travel.js";
import { views } from "./sheet_views.js";
import { say, WORDS } from "./words.js";

const RATE = 10; // a second: what an eye follows
const PATH_S = 30; // of the path before the page listened
const MOST_PATH = 600; // places: a minute at that rate
const SETTLED_MS = 250;
const AGAIN_MS = 3000;
const NEVER_MS = 400; // The stream begins with how the arm stands, if anything ever came of it.
const place = (id) => document.getElementById(id);
const arm = decodeURIComponent(location.pathname.split("/")[2]);
const path = `/v1/arms/${encodeURIComponent(arm)}`;

const state = {
  said: chosen({ tool: "", frame: "", form: "xyz-fixed", units: "", q: "" }),
  stored: null, answer: null, heardAt: 0, isLive: true, frames: [], trail: [],
  stop: () => {}, asking: null, settle: 0, text: 0, turn: 0,
};
const shown = { arms: [arm] };

async function start() {
  begin();
  const [elevation, plan, free] = ["elevation", "plan", "free"].map((name) =>
    document.querySelector(`[data-view=${name}]`));
  shown.views = views({ elevation, plan, free }, (scale) => setText(place("scale"), scale));
  shown.travel = travelTable(place("travel"), place("step"), { values: byHand, joint: point });
  shown.readings = readings(place("readings"));
  shown.notes = notes(place("says"));
  shown.texts = texts(place("text-blocks"));
  onTheme(() => shown.views.retint());
  state.isLive = !state.said.q;
  await load();
}

async function load() {
  state.upright ??= isUpright(arm);
  const stored = await ask(path);
  if (stored.problem?.code === "no-answer") {
    gone();
    return setTimeout(load, AGAIN_MS);
  }
  if (!stored.ok) return refused(stored.problem);
  back();
  state.stored = stored.data;
  await showStored();
  fitModes();
  anew();
  setInterval(tick, 250);
  place("texts").addEventListener("toggle", writeTexts);
}

/** A newer revision answers than is shown: show it, too, where it does not come with each answer. */
async function renew() {
  state.renews = true;
  const { ok, data } = await ask(path);
  if (ok) {
    state.stored = data;
    await showStored();
    askFrames();
  }
  setTimeout(() => (state.renews = false), ok ? 0 : AGAIN_MS);
}

/** What is stored, and the choices; what is not said takes what the arm says, and a z that is upright. */
async function showStored() {
  const { arm: told, units } = state.stored, { said } = state;
  const tools = Object.keys(told.tools ?? {});
  said.units ||= units;
  said.tool ||= told.default_tool ?? tools[0] ?? "flange";
  const cell = told.cell ? await ask(`/v1/cells/${encodeURIComponent(told.cell)}`) : null;
  const shared = cell?.data?.cell?.frames ?? {};
  const own = Object.keys(told.frames ?? {}), all = Object.keys(shared);
  const fixed = fixedFrames(shared, arm);
  shown.arms = [arm, ...fixed.arms];
  shown.drawn = ["base", "world", ...new Set([...own, ...fixed.names])];
  if (!said.frame) said.frame = (await state.upright) ? "base" : "world";
  fillSelect("tool", [...tools, "flange"]);
  fillSelect("frame", ["base", "world", ...own, ...all]);
  fillSelect("form", [...FORMS, "matrix"]);
  fillSelect("units", UNITS);
  setText(place("arm-title"), told.title ?? "");
  showTable(place("table"), state.stored);
  showRevisions(place("revisions"), path);
}

function fillSelect(name, known) {
  const select = place(name), now = state.said[name];
  fill(select, options([...new Set([...known, now])], now));
  select.onchange = () => {
    const { said, answer, isLive, waits } = state, was = said.units;
    said[name] = select.value;
    if (!isLive && answer) said.q = jointsIn(said.q, answer.poses[0].outline.travel, was, said.units);
    choose({ [name]: select.value, q: isLive || waits ? null : said.q });
    anew();
  };
}

const question = () => (({ tool, frame, form, units }) => ({ tool, frame, form, units }))(state.said);

/** Ask everything again, in the words that are chosen now. */
function anew() {
  state.stop();
  state.turn += 1; // What was asked in words chosen before is not drawn any more.
  Object.assign(state, { trail: [], frames: [], heard: false });
  shown.views.forget();
  askFrames();
  state.stop = follow(withQuery(`${path}/live/stream`, { ...question(), outline: 1, rate: RATE }), {
    event: heard, gone, refused,
    back() {
      back();
      setTimeout(() => state.heard || !state.isLive || withoutLive(), NEVER_MS);
    },
  });
  if (!state.isLive) askByHand();
}

async function askFrames() {
  const { turn } = state, { frame, units } = question();
  const found = await framesIn(shown.arms, shown.drawn.filter((name) => name !== frame), frame, units);
  if (turn !== state.turn) return;
  state.frames = found;
  draw();
}

function heard(name, data) {
  const answer = JSON.parse(data);
  if (!state.heard) askPath();
  state.heard = true;
  if (answer.poses) {
    state.trail.push(answer.poses[0].position);
    if (state.trail.length > MOST_PATH) state.trail.shift();
  }
  if (!state.isLive && !state.waits) return;
  if (state.waits) toLive();
  if (name === "pose") take(answer);
  else refused({ detail: answer.problem.say, errors: [answer.problem] });
}

/** Ask where the tool was before this page listened. */
async function askPath() {
  const asked = { ...question(), form: null, every_ms: 100, limit: 10 * PATH_S }, { turn } = state;
  const { ok, data } = await ask(withQuery(`${path}/live/history`, asked));
  if (turn !== state.turn) return;
  if (ok) state.trail = [...data.positions, ...state.trail];
  draw();
}

/** Nothing ever came of this arm: show it as it can stand, until something comes. */
async function withoutLive() {
  state.waits = true;
  setMode(false);
  const rows = state.stored.arm.rows.filter((row) => !row.passive);
  state.said.q = rows.map(({ travel: [low, high] = [0, 0] }) => Math.min(Math.max(0, low), high)).join();
  await askByHand();
}

function byHand(values) {
  state.waits = false;
  setMode(false);
  state.said.q = values.map((text) => String(typed(text))).join();
  const wrong = values.findIndex((text) => !Number.isFinite(typed(text)));
  shown.travel.wrong(wrong);
  if (wrong >= 0) return setText(place("problem"), say(WORDS.sheet.no_number, { joint: wrong + 1 }));
  choose({ q: state.said.q });
  askByHand();
}

async function askByHand() {
  state.asking?.abort();
  const { signal } = (state.asking = new AbortController());
  const asked = { q: state.said.q, ...question(), outline: 1 };
  const { ok, data, problem } = await ask(withQuery(`${path}/pose`, asked), { signal });
  if (signal.aborted) return;
  state.isOther = !ok;
  if (ok) return take(data);
  const isGoneNow = problem.code === "no-answer";
  if (isGoneNow) gone();
  tick(); // Before what is refused is said, which what is shown anew takes away.
  if (isGoneNow) setTimeout(() => signal.aborted || state.isLive || askByHand(), AGAIN_MS);
  else refused(problem);
}

/** Show one answer everywhere. */
function take(answer, heardAt = performance.now()) {
  const item = answer.poses[0];
  state.answer = answer;
  state.heardAt = heardAt;
  setText(place("problem"), "");
  const isRelied = quality() !== "bad";
  shown.readings.show(answer, isRelied);
  shown.notes(isRelied ? sentences(answer) : [signs(answer.say ?? "")].filter(Boolean));
  shown.travel.show(item.outline.travel, !state.isLive, isRelied);
  setText(place("revision"), answer.arm.revision);
  setText(place("digest"), answer.arm.digest);
  if (answer.arm.revision > state.stored.revision && !state.renews) renew();
  draw();
  tick();
  ready();
  clearTimeout(state.settle);
  state.settle = setTimeout(() => state.isLive || writeTexts(), SETTLED_MS);
}

/** Show on the drawing which way a joint's value rises. */
function point(joint) {
  if (joint === shown.rising) return;
  shown.rising = joint;
  draw();
}

function draw() {
  const { answer, said } = state;
  if (!answer) return;
  const { outline, singularity } = answer.poses[0];
  shown.views.show({
    arm, outline, singularity, toolName: typeof answer.tool === "string" ? answer.tool : "",
    frameName: answer.frame, frames: framesNear(outline.line, state.frames),
    path: state.isLive ? state.trail : [], balloons: true, rising: risingOf(outline.axes, state.stored.arm.rows, shown.rising),
    struck: quality() === "bad" ? wordOf(quality()) : "",
    kind: quality() === "good" || quality() === "typed" ? "thick" : "heavyDashed",
    unit: unitsOf(answer.units).length, units: said.units,
  });
}

/** What is shown may be of other values than those typed, where these got no answer. */
const quality = () => (!state.isLive ? (state.isOther ? "bad" : "typed") : isGone() ? "bad" : state.answer.quality);

const wordOf = (now) =>
  stateWord(now, now !== "typed" && isGone() ? "gone" : state.isLive ? state.answer.reason : "");

/** What changes by itself: ages, and whether anything can be relied on. */
function tick() {
  const { answer } = state;
  if (!answer) return;
  const now = quality(), waited = performance.now() - state.heardAt;
  const ageMs = state.isLive ? answer.age_ms + waited : null;
  const simulated = state.isLive && answer.simulated;
  showState(place("state"), { state: now, word: wordOf(now), ageMs, simulated });
  for (const one of document.querySelectorAll("[data-relied]")) one.dataset.relied = now;
  const was = state.shown;
  state.shown = now;
  if (now !== was) take(answer, state.heardAt);
  if (state.isLive && performance.now() - state.text > 1000) writeTexts();
}

function writeTexts() {
  if (!place("texts").open || !state.answer) return;
  state.text = performance.now();
  const asked = question();
  if (state.isLive) shown.texts.show(`${path}/live`, asked);
  else shown.texts.show(`${path}/pose`, { q: state.said.q, ...asked });
}

function fitModes() {
  setMode(state.isLive);
  place("mode-live").addEventListener("change", () => {
    toLive();
    anew();
  });
  place("mode-hand").addEventListener("change", () => {
    const { travel } = state.answer.poses[0].outline;
    byHand(travel.filter((one) => one.joint !== null).map((one) => String(one.value)));
  });
}

function toLive() {
  state.waits = false;
  setMode(true);
  state.said.q = "";
  choose({ q: null });
}

function setMode(isLive) {
  state.isLive = isLive;
  place("mode-live").checked = isLive;
  place("mode-hand").checked = !isLive;
  const { never, live_says: live, by_hand_says: byHandSays } = WORDS.sheet;
  setText(place("mode-says"), state.waits ? never : isLive ? live : byHandSays);
}

function refused(problem) {
  back(); // Whoever refuses is there.
  setText(place("problem"), refusal(problem));
  ready();
}

start();
