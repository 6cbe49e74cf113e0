// A long list as a survey: taken in, watched, cancelled; its result fetched when it is there.
// Idea: the survey's number stands in the address, so who reloads or comes back finds it again.
// Left out: what the result looks like (reach_list.js) and the report, which the service makes.

import { withQuery } from "./address.js";
import { ask, follow } from "./ask.js";
import { el } from "./elements.js";
import { back, gone } from "./shell.js";
import { say, WORDS } from "./words.js";

const OPEN = new Set(["queued", "running"]);
/** Results longer than this are not fetched into a page: a table of them is a file. */
const MOST_SHOWN = 20000;

/**
 * Return what shows and steers a survey in a place of the page.
 * @param {HTMLElement} place @param {string} arm whose surveys it shows
 * @param {{changed: (id: string | null) => void, found: (survey: object, results: object[]) => boolean}} told
 *   found: returns whether the result stands on the page now
 */
export function surveyDesk(place, arm, told) {
  const desk = { place, arm, told, stop: null };
  return {
    begin: (body, title) => begin(desk, body, title),
    watch: (id) => watch(desk, id),
  };
}

function leave(desk) {
  desk.stop?.();
  desk.stop = null;
  desk.place.replaceChildren();
  desk.told.changed(null);
}

async function begin(desk, body, title) {
  const request = { kind: "reach-checks", title, request: body };
  const answer = await ask("/v1/surveys", { method: "POST", body: request });
  if (!answer.ok) return answer;
  desk.told.changed(answer.data.id);
  await watch(desk, answer.data.id);
  return answer;
}

async function watch(desk, id) {
  desk.stop?.();
  const answer = await ask(`/v1/surveys/${encodeURIComponent(id)}`);
  if (!answer.ok) {
    desk.place.replaceChildren(el("p", { class: "refused" }, answer.problem.detail));
    return;
  }
  const { name } = answer.data.arm, words = WORDS.reach.survey;
  if (name !== desk.arm) {
    const there = withQuery(`/arms/${encodeURIComponent(name)}/reach`, { survey: id });
    return desk.place.replaceChildren(el("p", { class: "refused" }, words.other_arm, " ", el("a", { href: there }, name)));
  }
  const parts = frame(desk, answer.data);
  if (!OPEN.has(answer.data.state)) return ended(desk, answer.data.id);
  show(parts, answer.data);
  let isOver = false;
  desk.stop = follow(`/v1/surveys/${id}/progress`, {
    gone, back, ends: () => isOver, refused: () => ended(desk, id),
    event(name, data) {
      const told = JSON.parse(data);
      show(parts, told);
      isOver = !OPEN.has(told.state);
      if (isOver) ended(desk, id);
    },
  });
}

function frame(desk, survey) {
  const words = WORDS.reach.survey;
  const bar = el("progress", { max: 1, value: 0, "aria-label": words.bar });
  const line = el("p", { class: "figures" });
  const spoken = el("p", { class: "unseen", "aria-live": "polite" });
  const cancel = el("button", { type: "button" }, words.cancel);
  cancel.addEventListener("click", async () => {
    cancel.disabled = true;
    const answer = await ask(`/v1/surveys/${survey.id}/cancel`, { method: "POST" });
    if (!answer.ok) [line.textContent, cancel.disabled] = [answer.problem.detail, false];
  });
  desk.place.replaceChildren(el("h2", {}, survey.title ?? words.head), bar, line, cancel, spoken);
  return { bar, line, spoken, quarter: -1 };
}

function show(parts, { state, done, total, remaining_s: left }) {
  const words = WORDS.reach.survey;
  parts.bar.max = Math.max(total, 1);
  parts.bar.value = done;
  const time = left === null ? "" : say(words.left, { time: duration(left) });
  parts.line.textContent = say(words.line, {
    state: words.states[state] ?? state, done: counted(done), total: counted(total) }) + time;
  // A screen reader is told at each quarter, not at each event.
  const quarter = Math.floor((4 * done) / Math.max(total, 1));
  if (quarter !== parts.quarter) parts.spoken.textContent = parts.line.textContent;
  parts.quarter = quarter;
}

async function ended(desk, id) {
  const { ok, data: survey, problem } = await ask(`/v1/surveys/${id}`);
  const words = WORDS.reach.survey;
  if (!ok) return desk.place.replaceChildren(el("p", { class: "refused" }, problem.detail));
  const line = say(words.over[survey.state] ?? survey.state, {
    done: counted(survey.done), total: counted(survey.total), reason: survey.reason ?? "" });
  const parts = [el("h2", {}, survey.title ?? words.head), el("p", { role: "status" }, line)];
  const leaves = el("button", { type: "button", onclick: () => leave(desk) }, words.leave);
  const taken = survey.state === "succeeded" ? links(survey.links) : null;
  desk.place.replaceChildren(...parts, el("p", { class: "keys" }, taken, leaves));
  if (survey.state !== "succeeded") return;
  const small = survey.total <= MOST_SHOWN;
  const answer = small ? await ask(survey.links.result) : { ok: true, data: { results: [] } };
  const isShown = answer.ok && desk.told.found(survey, answer.data.results);
  if (!small) desk.place.append(el("p", {}, say(words.long, { most: counted(MOST_SHOWN) })));
  else if (!isShown) desk.place.append(el("p", {}, answer.ok ? words.other : answer.problem.detail));
}

function links({ report, result }) {
  const words = WORDS.reach.survey;
  const link = (href, text) => el("a", { href }, text);
  return [
    link(report, words.report), link(`${result}?format=csv`, words.csv),
    link(`${result}?format=json`, words.json), link(`${result}?format=npy`, words.npy)];
}

/** Whole numbers in groups of three. */
export const counted = (value) => String(value).replace(/\B(?=(\d{3})+$)/g, "\u2009");

function duration(seconds) {
  if (seconds < 90) return `${Math.max(1, Math.round(seconds))} s`;
  return seconds < 5400 ? `${Math.round(seconds / 60)} min` : `${(seconds / 3600).toFixed(1)} h`;
}
