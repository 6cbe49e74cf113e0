// The reach page: a list of part locations, verdicts as soon as it can be read, the chosen one drawn.
// Idea: short lists are asked whenever list or question change, so that no verdict is ever older
// than what stands beside it; long ones are a survey, begun by a key. Left out: all parts (reach_*).

import { choose, chosen } from "./address.js";
import { ask } from "./ask.js";
import { el, fill, setText } from "./elements.js";
import { number } from "./numbers.js";
import { column } from "./projection.js";
import { checkBody, refusedTargets, targetsOf, turnsOf } from "./reach_asking.js";
import { reachDrawing } from "./reach_drawing.js";
import { download, fileKey, listInput } from "./reach_input.js";
import { placesTable, verdictOf } from "./reach_list.js";
import { postures } from "./reach_postures.js";
import { questionDesk } from "./reach_question.js";
import { blankTable, readPlaces } from "./reach_reading.js";
import { counted, surveyDesk } from "./reach_survey.js";
import { targetDesk } from "./reach_target.js";
import { begin, ready } from "./shell.js";
import { say, WORDS } from "./words.js";

const AT_ONCE = 500;        // Longer lists wait for a key.
const MOST_AT_ONCE = 10000; // What one question may hold.
const MOST_DRAWN = 5000;    // More places would cover the paper, and each other.
const PAUSE_MS = 350;       // After the last key, so that half a number is not asked.
const AGAIN_MS = 3000;
const words = WORDS.reach;
const place = (id) => document.getElementById(id);

const page = {
  name: decodeURIComponent(location.pathname.split("/")[2]),
  arm: null, question: null, read: { places: [], faults: [], how: {} }, rows: [], at: -1,
  solution: null, control: null, timer: 0, method: "",
};

async function start() {
  begin({ watch: true });
  const answer = await ask(`/v1/arms/${encodeURIComponent(page.name)}`);
  if (!answer.ok) {
    fill(place("reading"), el("p", { class: "refused" }, answer.problem.detail));
    return setTimeout(start, AGAIN_MS);
  }
  page.arm = answer.data;
  const cell = page.arm.cell ?? page.arm.arm.cell;
  const shared = cell ? await ask(`/v1/cells/${encodeURIComponent(cell)}`) : null;
  fit(Object.keys(shared?.data?.cell?.frames ?? shared?.data?.frames ?? {}));
  page.input.begin();
  const { survey } = chosen({ survey: "" });
  if (survey) page.survey.watch(survey);
}

function fit(cellFrames) {
  about();
  page.question = questionDesk(place("question"), page.arm, cellFrames, asked);
  page.postures = postures(page.name);
  page.table = placesTable(place("table"), chosenPlace);
  page.target = targetDesk(place("target"), stepped);
  page.draw = reachDrawing(place("drawing"));
  page.survey = surveyDesk(place("survey"), { changed: (id) => choose({ survey: id }), found: surveyFound });
  const parts = { field: place("list"), zone: place("asked"), kept: `armspan-reach-${page.name}` };
  page.input = listInput(parts, asked, (text) => fill(place("reading"), el("p", { class: "refused" }, text)));
  keys();
  for (const [event, isWhole] of [["beforeprint", true], ["afterprint", false]]) addEventListener(event, () =>
    page.table.whole(isWhole));
}

function about() {
  const { name, revision, arm } = page.arm;
  const link = el("a", { href: `/arms/${encodeURIComponent(name)}` }, words.sheet);
  fill(place("about"), arm.title ?? "", arm.title ? " · " : "",
    say(words.revision, { revision, status: arm.status ?? "" }), " · ", link);
}

function keys() {
  const key = (text, act) => el("button", { type: "button", onclick: act }, text);
  page.results = key(words.input.results, results);
  page.report = key(words.input.report, report);
  fill(place("keys"),
    fileKey(page.input.take),
    key(words.input.blank, () => download("part-locations.csv", blankTable(turnsOf(page.question().form)))),
    key(words.input.now, presentPlace), page.results, page.report,
    key(words.input.print, () => print()), key(words.input.clear, () => page.input("")));
}

/** List or question changed: read anew, forget what was answered, ask if it is short. */
function asked() {
  page.isSent = false;
  page.control?.abort();
  clearTimeout(page.timer);
  const question = page.question();
  page.read = readPlaces(place("list").value, { turns: turnsOf(question.form), decimal: question.decimal });
  const { places, faults } = page.read;
  const all = [...places.map((one) => ({ place: one, line: one.line })),
    ...faults.map((fault) => ({ place: null, line: fault.line, fault: faultWords(fault) }))];
  page.rows = all.sort((a, b) => a.line - b.line);
  page.targets = null;
  const count = places.length;
  for (const one of [page.results, page.report]) one.disabled = !count;
  page.results.disabled ||= count > MOST_AT_ONCE;
  told(count > AT_ONCE ? say(words.long, { count: counted(count) }) : "");
  shown();
  if (count && count <= AT_ONCE) page.timer = setTimeout(check, PAUSE_MS);
  else ready();
}

function faultWords(fault) {
  return say(words.faults[fault.code] ?? fault.code, { ...fault, line: fault.line });
}

/** How the table was read, in a sentence, and what could not be. */
function told(more) {
  const { how, places, faults } = page.read;
  const lines = [];
  if (places.length || faults.length) {
    const columns = how.columns.filter(Boolean).join(" ");
    lines.push(el("p", {}, say(words.read, {
      count: counted(places.length), columns, separator: words.separators[how.separator],
      decimal: words.decimals[how.decimal],
    }), how.left.length ? say(words.left_out, { columns: how.left.join(", ") }) : ""));
  } else lines.push(el("p", { class: "quiet" }, words.empty));
  if (how.doubt && how.decimal === "comma") lines.push(
    el("p", { class: "refused" }, say(words.doubt, { cell: how.doubt })));
  if (faults.length) lines.push(el("p", { class: "refused" },
    say(words.unread, { count: counted(faults.length) }), " ", faultWords(faults[0])));
  if (more) lines.push(el("p", {}, more));
  fill(place("reading"), lines);
}

function shown() {
  const question = page.question();
  page.table.show(page.rows, question.units);
  const known = page.at >= 0 && page.at < page.rows.length;
  page.at = -1;
  if (page.rows.length) page.table.choose(known ? page.keptAt : 0);
  else chosenPlace(-1);
}

function targets() {
  page.targets ??= targetsOf(page.read.places, page.question());
  return page.targets;
}

async function check() {
  const control = (page.control = new AbortController());
  const body = checkBody(page.name, page.question(), targets(), "best");
  const answer = await ask("/v1/reach/checks", { method: "POST", body, signal: control.signal });
  if (control.signal.aborted) return;
  ready();
  if (answer.ok) return answered(answer.data);
  if (answer.problem.code === "no-answer") {
    page.timer = setTimeout(check, AGAIN_MS);
    return;
  }
  const found = refusedTargets(answer.problem), rows = page.rows.filter((row) => row.place);
  found.forEach((text, at) => rows[at] && (rows[at].refused = text));
  told("");
  place("reading").append(el("p", { class: "refused" }, refusal(answer.problem)));
  redraw();
}

const refusal = (problem) =>
  [problem.detail, ...problem.errors.slice(0, 1).map((error) => error.way_out)].filter(Boolean).join("; ");

function answered({ results: found, method }) {
  page.method = method?.say ?? "";
  const rows = page.rows.filter((row) => row.place);
  found.forEach((result, i) => {
    rows[i].result = result;
    if (result.verdict === null || result.verdict === undefined) rows[i].refused =
      result.reason?.say ?? result.say ?? refusal({ detail: "", errors: [], ...result });
  });
  redraw();
}

/** Show the rows with their verdicts; the choice stays. */
function redraw() {
  const at = page.at;
  page.table.show(page.rows, page.question().units);
  page.at = -1;
  page.table.choose(Math.max(at, 0));
}

async function chosenPlace(at) {
  page.at = page.keptAt = at;
  const row = page.rows[at];
  page.solution = null;
  if (!row?.place) {
    page.target(null);
    return drawNow();
  }
  look(row, true);
  if (!row.result || row.isWhole) return;
  const body = checkBody(page.name, page.question(), targetsOf([row.place], page.question()), "all");
  const answer = await ask("/v1/reach/checks", { method: "POST", body });
  if (page.rows[page.at] !== row || !answer.ok) return;
  Object.assign(row, { result: answer.data.results[0], isWhole: true, method: answer.data.method.say });
  look(row, false);
}

function look(row, waits) {
  const name = row.place.name ?? say(words.list.line, { line: row.place.line });
  const method = row.method ?? page.method;
  page.target({ arm: page.arm, row, name, question: page.question(), method, waits: waits && !row.isWhole });
}

function stepped(solution) {
  page.solution = solution;
  drawNow();
}

/** Draw what is known, and again when more is: outlines first, the envelope when it comes. */
async function drawNow() {
  const row = page.rows[page.at], { solution } = page, question = page.question();
  const isStill = () => page.rows[page.at] === row && page.solution === solution;
  const approach = solution?.approach, before = approach?.start?.joints ?? approach?.breaks?.joints;
  const [outline, start, put] = await Promise.all([
    // Without a solution no arm is drawn: one as it stood once could be taken for where it is.
    solution ? page.postures.outline(solution.joints, question) : null,
    before ? page.postures.outline(before, question) : null,
    page.postures.frameInBase(question),
  ]);
  if (!isStill()) return;
  const picture = pictureOf({ row, outline, before: start, put, question, approach });
  draw(picture);
  const envelope = await page.postures.envelope(question);
  if (isStill() && envelope) draw({ ...picture, envelope });
}

function pictureOf({ row, outline, before, put, question, approach }) {
  const at = (one) => ({ at: put(one.place.position), verdict: verdictOf(one) });
  const reason = row?.result?.reason, near = reason?.nearest;
  const toolAt = (one) => column(one.tool, 3);
  return {
    envelope: page.envelope ?? null, outline, before, units: question.units, toolName: question.tool,
    places: put ? page.rows.filter((one) => one.place && one !== row).slice(0, MOST_DRAWN).map(at) : [],
    chosen: put && row?.place ? { ...at(row), name: row.place.name ?? String(page.at + 1) } : null,
    way: outline && before ? { from: toolAt(before), to: toolAt(outline), isBroken: !approach.ok } : null,
    nearest: put && near ? put(near.position) : null,
    missing: near && reason.shortfall ? `${number(reason.shortfall, 1)} ${reason.unit}` : "",
  };
}

function draw(picture) {
  page.envelope = picture.envelope;
  page.draw(picture);
  const { frame, tool, units } = page.question(), { name, revision, digest } = page.arm;
  const lines = {
    arm: name, revision: `${revision} (${digest})`, tool, frame, units, scale: place("drawing").dataset.scale ?? "" };
  fill(place("block"), Object.entries(lines).map(([key, value]) =>
    el("tr", {}, el("th", { scope: "row" }, words.block_lines[key]), el("td", {}, value))));
  const verdict = picture.chosen
    ? say(words.drawn, { name: picture.chosen.name, verdict: words.verdicts[picture.chosen.verdict] ?? "" })
    : words.drawn_none;
  place("drawing").setAttribute("aria-label", verdict);
  setText(place("legend"), picture.envelope ? words.legend : words.envelope_waits);
  ready();
}

/** Append where the tool is now, as the live arm says it, as a line of the list. */
async function presentPlace() {
  const { tool, frame, units, form } = page.question();
  const asked = new URLSearchParams({ frame, units, form, ...(tool ? { tool } : {}) });
  const answer = await ask(`/v1/arms/${encodeURIComponent(page.name)}/live?${asked}`);
  const pose = answer.data?.poses?.[0];
  if (!answer.ok || !pose?.position) return fill(place("reading"),
    el("p", { class: "refused" }, answer.problem?.detail ?? words.input.no_live));
  const field = place("list"), decimal = page.read.how.decimal === "comma" ? "," : ".";
  const sign = { tab: "\t", semicolon: ";", blank: " " }[page.read.how.separator] ?? ",";
  const columns = page.read.how.columns?.length ? page.read.how.columns : null;
  const values = [...pose.position, ...pose.orientation.values.flat()].map((value) =>
    String(Number(value.toFixed(4))).replace(".", decimal));
  const line = columns && !columns.includes("name") ? values : [`now-${page.rows.length + 1}`, ...values];
  page.input(
    `${field.value}${field.value && !field.value.endsWith("\n") ? "\n" : ""}${line.join(columns ? sign : ", ")}\n`);
}

async function results() {
  const body = checkBody(page.name, page.question(), targets(), "all");
  const answer = await ask("/v1/reach/checks?format=csv", { method: "POST", body });
  if (answer.ok) download(`${page.name}-reach.csv`, answer.data);
  else place("reading").append(el("p", { class: "refused" }, refusal(answer.problem)));
}

async function report() {
  const body = checkBody(page.name, page.question(), targets(), "best");
  delete body.solutions;
  page.isSent = true;
  const title = say(words.survey.title, { arm: page.name, count: counted(page.read.places.length) });
  const answer = await page.survey.begin(body, title);
  if (!answer.ok) place("reading").append(el("p", { class: "refused" }, refusal(answer.problem)));
}

/** The result of a survey: beside the list it came from while that stands unchanged, or else alone. */
function surveyFound(survey, found) {
  if (page.isSent) return answered({ results: found });
  page.rows = found.map((result, i) => ({ place: null, line: i + 1, result }));
  page.table.show(page.rows, survey.units);
}

start();
