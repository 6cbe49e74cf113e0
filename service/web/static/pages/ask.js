// Questions to the service, and streams of events that come back after any break.
// A stream is read by fetch, not by EventSource: so its comments count as signs of life, and a refusal
// can be read. Left out: what is said about it on the page (shell.js).
import { signs } from "./numbers.js";
import { WORDS } from "./words.js";

const SILENT_MS = 10000; // The server sends a comment every 5 s: two are missing.
const FIRST_WAIT_MS = 500;
const LONGEST_WAIT_MS = 4000;

/**
 * @typedef {{code: string, title: string, detail: string, status: number, errors: Array}} Problem
 * @typedef {{ok: boolean, status: number, data: any, problem: Problem|null, headers: Headers|null}} Answer
 */

/**
 * Ask once. Never throws: without an answer the problem's code is "no-answer", or "aborted".
 * @param {string} path
 * @param {{method?: string, body?: any, headers?: Record<string, string>, signal?: AbortSignal}} how
 *     body: text, bytes, or anything else that is sent as JSON
 * @returns {Promise<Answer>} data is JSON where the answer is JSON, else text
 */
export async function ask(path, { method = "GET", body, headers = {}, signal } = {}) {
  const raw = body === undefined || typeof body === "string"
    || body instanceof Blob || ArrayBuffer.isView(body);
  const sent = raw ? body : JSON.stringify(body);
  const type = raw ? {} : { "Content-Type": "application/json" };
  try {
    const answer = await fetch(path, { method, body: sent, headers: { ...type, ...headers }, signal });
    const data = await dataOf(answer);
    const problem = answer.ok || answer.status === 304 ? null : problemOf(data, answer.status);
    return { ok: problem === null, status: answer.status, data, problem, headers: answer.headers };
  } catch (error) {
    const [code, title, detail] =
      error.name === "AbortError"
        ? ["aborted", WORDS.shell.aborted, WORDS.shell.aborted_detail]
        : ["no-answer", WORDS.shell.no_answer, WORDS.shell.no_answer_detail];
    const problem = { code, title, detail, status: 0, errors: [] };
    return { ok: false, status: 0, data: null, problem, headers: null };
  }
}

/** What a problem says, and the way out. @param {{detail: string, errors: object[]}} problem */
export const refusal = ({ detail, errors = [] }) =>
  signs([detail, ...errors.slice(0, 1).map((error) => error.way_out)].filter(Boolean).join("; "));

/** Whether what was asked may well be answered later. @param {Answer} answer */
export const isBusy = ({ status }) => [0, 429, 503].includes(status);

/**
 * Follow a stream of events until stop() is called. After a break it is asked for anew from the newest
 * on: a server that was started again counts afresh, and what it never says again must not stand.
 * @param {string} path
 * @param {{event: (name: string, data: string, id: string) => void,
 *          gone?: (since: Date, problem: Problem|null) => void, back?: () => void,
 *          refused?: (problem: Problem) => void, ends?: () => boolean}} told
 *     event: data is text as it came; gone: once per break; back: at each begin;
 *     refused: a 4xx, which is not asked again; ends: asked at the end of a stream, true: it is over
 * @returns {() => void} stop
 */
export function follow(path, told) {
  const state = { stopped: false, wait: FIRST_WAIT_MS, isGone: false, control: null, timer: 0 };
  const again = (problem) => {
    if (state.stopped) return;
    if (!state.isGone) told.gone?.(new Date(), problem);
    state.isGone = true;
    state.timer = setTimeout(once, state.wait * (0.75 + Math.random() / 2));
    state.wait = Math.min(state.wait * 2, LONGEST_WAIT_MS);
  };
  const once = async () => {
    state.control = new AbortController();
    const { problem, isOver } = await read(path, state, told);
    if (state.stopped || isOver) return;
    if (problem && problem.status >= 400 && problem.status < 500 && problem.status !== 429) {
      told.refused?.(problem);
      state.stopped = true;
    } else again(problem);
  };
  const pause = () => {
    state.stopped = true;
    clearTimeout(state.timer);
    state.control?.abort();
  };
  // A page that is left may be kept for the way back: its stream would hold one of six connections.
  const resume = (shown) => {
    if (!shown.persisted) return;
    state.stopped = false;
    once();
  };
  addEventListener("pagehide", pause);
  addEventListener("pageshow", resume);
  once();
  return () => {
    removeEventListener("pagehide", pause);
    removeEventListener("pageshow", resume);
    pause();
  };
}

/** Read one connection to its end; the problem is null where it simply ended. */
async function read(path, state, told) {
  let watch = setTimeout(() => state.control.abort(), SILENT_MS);
  const alive = () => {
    clearTimeout(watch);
    watch = setTimeout(() => state.control.abort(), SILENT_MS);
  };
  try {
    const answer = await fetch(path, { signal: state.control.signal, cache: "no-store" });
    if (!answer.ok) return { problem: problemOf(await dataOf(answer), answer.status) };
    state.isGone = false;
    told.back?.();
    const split = events((name, data, id) => {
      if (!state.stopped) told.event(name, data, id);
    });
    const reader = answer.body.pipeThrough(new TextDecoderStream()).getReader();
    for (let part = await reader.read(); !part.done; part = await reader.read()) {
      alive();
      state.wait = FIRST_WAIT_MS;
      split(part.value);
    }
    return { problem: null, isOver: Boolean(told.ends?.()) };
  } catch {
    return { problem: null };
  } finally {
    clearTimeout(watch);
  }
}

/** Return what takes parts of an event stream (WHATWG HTML, 9.2) and tells each whole event. */
export function events(tell) {
  let rest = "";
  return (text) => {
    const blocks = (rest + text).split("\n\n");
    rest = blocks.pop();
    for (const block of blocks) {
      const found = { event: "message", data: [], id: "" };
      for (const line of block.split("\n")) {
        const colon = line.indexOf(":");
        const value = line.slice(colon + 1).replace(/^ /, "");
        if (colon > 0 && line.startsWith("data")) found.data.push(value);
        else if (colon > 0) found[line.slice(0, colon)] = value;
      }
      if (found.data.length) tell(found.event, found.data.join("\n"), found.id);
    }
  };
}

async function dataOf(answer) {
  const type = answer.headers.get("Content-Type") ?? "";
  const text = await answer.text();
  if (!/json/.test(type) || !text) return text;
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}

function problemOf(data, status) {
  const isProblem = data && typeof data === "object" && typeof data.code === "string";
  if (isProblem) return { errors: [], ...data, status };
  return { code: "unread", title: WORDS.shell.unread, detail: WORDS.shell.unread_detail, status, errors: [] };
}
