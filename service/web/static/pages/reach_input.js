// Where a list comes from: typed, pasted, a file chosen or dropped; and what can be taken along.
// Idea: whatever it was, it becomes text in the one field, where it can be seen and mended.
// Left out: reading the text (reach_reading.js).

import { el } from "./elements.js";
import { WORDS } from "./words.js";

const MOST_BYTES = 64 * 1024 * 1024;
const KEPT_CHARACTERS = 500000;   // A browser's store for a page is small.

/**
 * Fit field, file and drop; `changed` is called when the text is another one, `said` with what
 * cannot be read.
 * @param {{field: HTMLTextAreaElement, zone: HTMLElement, kept: string}} parts
 * @param {(isTyped: boolean) => void} changed isTyped: a key more may follow
 * @param {(words: string) => void} said
 * @returns {(text: string) => void} puts a text into the field
 */
export function listInput({ field, zone, kept }, changed, said) {
  const put = (text) => {
    field.value = text;
    told(false);
  };
  const told = (isTyped) => {
    keep(kept, field.value);
    changed(isTyped);
  };
  field.addEventListener("input", ({ inputType }) => told(/^(insertText|insertLine|delete)/.test(inputType)));
  const take = async (file) => {
    const text = await textOf(file);
    if (text === null) said(WORDS.reach.input.no_table);
    else put(text);
  };
  zone.addEventListener("dragover", (event) => {
    event.preventDefault();
    zone.dataset.over = "yes";
  });
  for (const name of ["dragleave", "drop"]) zone.addEventListener(name, () => delete zone.dataset.over);
  zone.addEventListener("drop", (event) => {
    event.preventDefault();
    const [file] = event.dataTransfer.files;
    if (file) take(file);
    else put(event.dataTransfer.getData("text/plain"));
  });
  return Object.assign(put, { take, begin: () => put(field.value || (recall(kept) ?? "")) });
}

/**
 * A place as a line of the list that is there, in its columns, separator and decimal mark.
 * @param {{position: number[], orientation: {values: number[]}}} pose
 * @param {string} name @param {object} how as `readPlaces` tells it
 */
export function lineOf({ position, orientation }, name, how) {
  const mark = how.decimal === "comma" ? "," : ".";
  const sign = { tab: "\t", semicolon: ";", blank: " " }[how.separator] ?? ",";
  const columns = how.columns?.length ? how.columns : null;
  const values = [...position, ...orientation.values.flat()].map((value) =>
    String(Number(value.toFixed(4))).replace(".", mark));
  const line = columns && !columns.includes("name") ? values : [name, ...values];
  return line.join(columns ? sign : ", ");
}

/** A key that opens a file of this computer. */
export function fileKey(take) {
  const field = el("input", {
    type: "file", accept: ".csv,.txt,.tsv,text/*", class: "unseen", tabindex: -1, "aria-hidden": "true",
    onchange() {
      if (field.files[0]) take(field.files[0]);
      field.value = "";
    },
  });
  return [el("button", { type: "button", onclick: () => field.click() }, WORDS.reach.input.open), field];
}

/** Give a text to the viewer as a file. */
export function download(name, text, type = "text/csv") {
  const href = URL.createObjectURL(new Blob([text], { type }));
  el("a", { href, download: name }).click();
  setTimeout(() => URL.revokeObjectURL(href), 1000);
}

/** The text of a file, whichever of the usual ways it is written in; null for what is no text. */
async function textOf(file) {
  if (file.size > MOST_BYTES) return null;
  const bytes = new Uint8Array(await file.arrayBuffer());
  const marks = { "255,254": "utf-16le", "254,255": "utf-16be" };
  const wide = marks[bytes.subarray(0, 2).join()];
  if (wide) return new TextDecoder(wide).decode(bytes);
  const isPacked = String.fromCharCode(...bytes.subarray(0, 2)) === "PK";
  if (isPacked || bytes.subarray(0, 4096).includes(0)) return null;
  try {
    return new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch {
    return new TextDecoder("windows-1252").decode(bytes);
  }
}

/** Keep a text for this page as long as the tab is open. @param {string} name @param {string} text */
export function keep(name, text) {
  try {
    if (text.length <= KEPT_CHARACTERS) sessionStorage.setItem(name, text);
    else sessionStorage.removeItem(name);
  } catch {
    // A panel without storage forgets the list with the page.
  }
}

/** What was kept, or null. @param {string} name */
export function recall(name) {
  try {
    return sessionStorage.getItem(name);
  } catch {
    return null;
  }
}
