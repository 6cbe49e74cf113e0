// The reach page: a list of part locations, verdicts as soon as it can be read, the chosen one drawn.
// Idea: short lists are asked whenever list or question change, so that no verdict is ever older
// than what stands beside it; long ones are a survey, begun by a key. Left out: all parts (reach_*).

import { choose, chosen } from "./address.js";
import { ask, refusal } from "./ask.js";
import { el, fill } from "./elements.js";
import { verticalOf } from "./frames.js";
import { signs, unitsOf } from "./numbers.js";
import { checkBody, refusedTargets, targetsOf, turnsOf } from "./reach_asking.js";
import { download, fileKey, keep, lineOf, listInput, recall } from "./reach_input.js";
import { placesTable } from "./reach_list.js";
import { pictureDesk } from "./reach_picture.js";
import { questionDesk } from "./reach_question.js";
import { blankTable, readPlaces } from "./reach_reading.js";
import { counted, surveyDesk } from "./reach_survey.js";
import { targetDesk } from "./reach_target.js";
import { turns } from "./reach_turns.js";
import { begin } from "./shell.js";
import { say, WORDS } from "./words.js";

const AT_ONCE = 500;        // Longer lists wait for a key.
const MOST_AT_ONCE = 10000; // What one question may hold.
const PAUSE_MS = 350;       // After the last key, so that half a number is not asked.
const STEP_MS = 120;        // Who steps through the list by a key that is held asks for the last alone.
const AGAIN_MS = 3000;
const NARROW = "(max-width: 48rem)";
const words = WORDS.reach;
const place = (id) => document.getElementById(id);

const page = {
  name: decodeURIComponent(location.pathname.split("/")[2]), turn: turns(),
  arm: null, question: null, read: { places: [], faults: [], how: {} }, rows: [], at: -1,
  control: null, timer: 0, single: null, method: "", sent: null, asking: null,
};
const sent = `armspan-reach-sent-${page.name}`;

async function start() {
  page.vertical ??= verticalOf(page.name);
  const answer = await ask(`/v1/arms/${encodeURIComponent(page.name)}`);
  if (!answer.ok) {
    fill(place("reading"), refused(answer.problem.detail));
    return setTimeout(start, AGAIN_MS);
  }
  page.arm = answer.data;
  fit(await page.vertical);
  const { survey } = chosen({ survey: "" });
  const isOwn = survey && recall(sent) === survey;
  page.input.begin();
  if (isOwn) markSent(survey);
  if (survey) page.survey.watch(survey);
  const cell = page.arm.cell ?? page.arm.arm.cell;
  const shared = cell ? await ask(`/v1/cells/${encodeURIComponent(cell)}`) : null;
  page.desk.frames(Object.keys(shared?.data?.cell?.frames ?? shared?.data?.frames ?? {}));
}

const refused = (text) => el("p", { class: "refused" }, text);
const trouble = (text) => place("reading").append(refused(text));

function fit(vertical) {
  about();
  page.desk = questionDesk(place("question"), page.arm, () => asked(false));
  page.question = page.desk.now;
  const looked = { canvas: place("drawing"), legend: place("legend"), block: place("block") };
  page.picture = pictureDesk(looked, page.arm, vertical, page.turn);
  page.table = placesTable(place("table"), chosenPlace);
  page.target = targetDesk(place("target"), draw);
  page.survey = surveyDesk(place("survey"), page.name, { changed: surveyChanged, found: surveyFound });
  const parts = { field: place("list"), zone: place("asked"), kept: `armspan-reach-${page.name}` };
  page.input = listInput(parts, asked, (text) => fill(place("reading"), refused(text)));
  keys();
  for (const [event, isWhole] of [["beforeprint", true], ["afterprint", false]]) addEventListener(event, () =>
    page.table.whole(isWhole));
}

function about() {
  const { name, revision, arm } = page.arm;
  const link = el("a", { href: `/arms/${encodeURIComponent(name)}` }, words.sheet);
  const said = [say(words.revision, { revision }), arm.status].filter(Boolean).join(", ");
  fill(place("about"), arm.title ?? "", arm.title ? " · " : "", said, " · ", link);
}

function keys() {
  const key = (text, act) => el("button", { type: "button", onclick: act }, text);
  page.results = key(words.input.results, results);
  page.report = key(words.input.report, report);
  page.print = key(words.input.print, () => print());
  const blank = () => {
    const { form, units } = page.question();
    download("part-locations.csv", blankTable(turnsOf(form), unitsOf(units)));
  };
  fill(place("keys"), fileKey(page.input.take), key(words.input.blank, blank),
    key(words.input.now, presentPlace), key(words.input.clear, () => page.input("")));
  fill(place("outcome"), page.report, page.results, page.print);
  place("back").onclick = () => place("table").querySelector(".choice[tabindex='0']")?.focus();
}

/** List or question changed: read anew, forget what was answered, ask if it is short. */
function asked(isTyped) {
  markSent(null);
  page.control?.abort();
  clearTimeout(page.timer);
  page.turn.touch();
  const question = page.question();
  page.read = readPlaces(place("list").value, { turns: turnsOf(question.form), decimal: question.decimal });
  const { places, faults } = page.read;
  const all = [...places.map((one) => ({ place: one, line: one.line })),
    ...faults.map((fault) => ({ place: null, line: fault.line, name: fault.name, fault: faultWords(fault) }))];
  page.rows = all.sort((a, b) => a.line - b.line);
  page.targets = null;
  const count = places.length;
  for (const id of ["outcome", "back"]) place(id).hidden = !page.rows.length;
  page.report.disabled = !count;
  page.results.disabled = !count || count > MOST_AT_ONCE;
  told(count > AT_ONCE ? say(words.long, { count: counted(count) }) : "");
  shown(Math.max(page.at, 0));
  if (count && count <= AT_ONCE) page.timer = setTimeout(check, isTyped ? PAUSE_MS : 0);
}

/** Note which survey was made of the list as it stands, also for who loads the page again. */
function markSent(id) {
  page.sent = id;
  keep(sent, id ?? "");
}

/** Another survey is looked at, or none: it is of the list if that is as it was when it was sent. */
function surveyChanged(id) {
  choose({ survey: id });
  if (page.rows === page.asking) markSent(id);
  page.asking = null;
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
    lines.push(el("p", {}, say(places.length === 1 ? words.read_one : words.read, {
      count: counted(places.length), columns, separator: words.separators[how.separator],
      decimal: words.decimals[how.decimal],
    }), how.left.length ? say(words.left_out, { columns: how.left.join(", ") }) : ""));
  } else lines.push(el("p", { class: "quiet" }, words.empty));
  if (how.doubt && how.decimal === "comma") lines.push(refused(say(words.doubt, { cell: how.doubt })));
  const unread = faults.length === 1 ? words.unread_one : words.unread;
  if (faults.length) lines.push(refused(
    `${say(unread, { count: counted(faults.length) })} ${faultWords(faults[0])}`));
  if (more) lines.push(el("p", {}, more));
  fill(place("reading"), lines);
}

/** Show the rows anew, one of them chosen. */
function shown(at) {
  page.table.show(page.rows, page.question().units);
  page.at = -1;
  if (page.rows.length) page.table.choose(Math.min(at, page.rows.length - 1));
  else chosenPlace(-1);
}

function targets() {
  page.targets ??= targetsOf(page.read.places, page.question());
  return page.targets;
}

const checked = (body, signal, end = "") =>
  page.turn.first(() => ask(`/v1/reach/checks${end}`, { method: "POST", body, signal }));

async function check() {
  const control = (page.control = new AbortController());
  const body = checkBody(page.arm, page.question(), targets(), "best");
  const answer = await checked(body, control.signal);
  if (control.signal.aborted) return;
  if (answer.ok) return answered(answer.data);
  if (answer.problem.code === "no-answer") {
    page.timer = setTimeout(check, AGAIN_MS);
    return;
  }
  const rows = page.rows.filter((row) => row.place);
  refusedTargets(answer.problem).forEach((text, at) => rows[at] && (rows[at].refused = text));
  told("");
  trouble(refusal(answer.problem));
  redraw();
}

/** Put results beside their rows, of which nothing else was known till then. */
function answered({ results: found, method }) {
  page.method = method?.say ?? "";
  const rows = page.rows.filter((row) => row.place);
  found.forEach((result, i) => {
    const why = result.problem ?? result.reason;
    const isJudged = Boolean(result.verdict);
    Object.assign(rows[i], { result, isWhole: false, method: null, refused: isJudged ? null : refusal({
      detail: why?.say ?? "", errors: why ? [why] : [] }) });
  });
  told("");
  redraw();
}

/** Show the rows with their verdicts; the choice and the page of the table stay. */
function redraw() {
  page.table.renew();
  chosenPlace(page.at);
}

async function chosenPlace(at, isPointed = false) {
  page.at = at;
  page.single?.abort();
  const row = page.rows[at];
  if (!row) {
    page.target(null);
    return draw(null);
  }
  if (isPointed && matchMedia(NARROW).matches) place("shown").scrollIntoView({ block: "start" });
  const isOpen = row.place && row.result?.verdict && !row.isWhole;
  look(row, { waits: isOpen });
  if (isOpen) single(row);
}

/** Ask about one place alone, for all its solutions. */
async function single(row) {
  const { signal } = (page.single = new AbortController());
  page.turn.touch();
  await new Promise((done) => setTimeout(done, STEP_MS));
  if (signal.aborted) return;
  const question = page.question();
  const body = checkBody(page.arm, question, targetsOf([row.place], question), "all");
  const answer = await checked(body, signal);
  if (signal.aborted) return;
  if (!answer.ok) return look(row, { trouble: refusal(answer.problem) });
  Object.assign(row, { result: answer.data.results[0], isWhole: true, method: answer.data.method.say });
  look(row, {});
}

function look(row, { waits = false, trouble: said = "" }) {
  const question = row.question ?? page.question();
  page.target({ arm: page.arm, row, question, method: row.method ?? page.method, waits, trouble: said });
}

/** Draw the place that is chosen, at one of its solutions. */
function draw(solution) {
  const { rows, at } = page, row = rows[at] ?? null;
  page.picture({ row, rows, at, solution, question: row?.question ?? page.question() });
}

/** Append where the tool is now, as the live arm says it, as a line of the list. */
async function presentPlace() {
  const { tool, frame, units, form } = page.question();
  const said = new URLSearchParams({ frame, units, form, ...(tool ? { tool } : {}) });
  const answer = await ask(`/v1/arms/${encodeURIComponent(page.name)}/live?${said}`);
  const { poses, quality, simulated, say: why } = answer.data ?? {};
  const pose = poses?.[0], isDoubted = quality !== "good" && quality !== "uncertain";
  if (!answer.ok || !pose?.position || isDoubted) return trouble(
    signs(answer.problem?.detail || why || words.input.no_live));
  const { value } = place("list");
  const name = `${simulated ? "simulated" : "now"}-${page.rows.length + 1}`;
  page.input(`${value}${value && !value.endsWith("\n") ? "\n" : ""}${lineOf(pose, name, page.read.how)}\n`);
  if (quality !== "good") trouble(signs(why || quality));
}

async function results() {
  const body = checkBody(page.arm, page.question(), targets(), "all");
  const answer = await checked(body, undefined, "?format=csv");
  if (answer.ok) download(`${page.name}-reach.csv`, answer.data);
  else trouble(refusal(answer.problem));
}

async function report() {
  const body = checkBody(page.arm, page.question(), targets(), "best");
  delete body.solutions;
  page.asking = page.rows;
  const title = say(words.survey.title, { arm: page.name, count: counted(page.read.places.length) });
  const answer = await page.survey.begin(body, title);
  if (!answer.ok) trouble(refusal(answer.problem));
}

/** The result of a survey: beside the list it came from while that stands unchanged, or alone. */
function surveyFound({ id, request, arm, units }, found) {
  if (id === page.sent && arm.revision === page.arm.revision) answered({ results: found });
  else if (page.rows.length) return false;
  else {
    const { tool, frame = "base" } = request;
    const question = { ...page.question(), tool, frame, units, revision: arm.revision };
    // Known is where, not how turned: nothing more can be asked about such a place.
    page.rows = found.map((result, i) => ({
      place: result.position && { position: result.position, line: i + 1 },
      line: i + 1, name: result.name, result, question, method: "", isWhole: true }));
    shown(0);
  }
  return true;
}

begin({ watch: true });
start();
