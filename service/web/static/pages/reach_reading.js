// Part locations out of a pasted or dropped table: separators, decimal marks, columns.
// Idea: a table comes from a spreadsheet in any country, so its separator and decimal mark are found
// from the table as a whole, never cell by cell, and told, so that a wrong guess is seen. What can be
// read two ways is refused, not guessed. Faults are codes with values; words stand in words.js.
// Left out: the meaning of the angles, and asking.

/** Most places of one list; the service takes no more. */
const MOST_PLACES = 1000000;
const LONGEST_NAME = 200;
const SAMPLE = 200;                       // lines looked at to find the separator
const POSITION = ["x", "y", "z"];
const FREEDOMS = new Set(["none", "spin", "orientation"]);
const QUOTE = "\"";
const SPACES = /[\s\u00a0\u2007\u2009\u202f]/g;
const GROUPING = "['\u2019 ]";
const PLAIN = new RegExp(`^[+-]?(\\d{1,3}(${GROUPING}\\d{3})+|\\d+)$`);

/**
 * Read a table of places.
 *
 * @param {string} text as typed, pasted or read from a file.
 * @param {{turns?: number, decimal?: "auto"|"point"|"comma"}} asked how many numbers an orientation has.
 * @returns {{places: Place[], faults: Fault[], how: How}} of each line a place or a fault; no blank ones
 * @typedef {{line: number, name: string|null, position: number[], turns: number[]|null,
 *   freedom: string|{cone: number}|null, approach: number|null}} Place
 * @typedef {{line: number, name?: string|null, code: string, cell?: string, column?: string, text?: string}} Fault
 * @typedef {{separator: string, decimal: string, columns: string[], header: boolean, left: string[],
 *   doubt: string|null}} How
 */
export function readPlaces(text, { turns = 3, decimal = "auto" } = {}) {
  const clean = text.replace(/^\ufeff/, "").replace(/\r\n?/g, "\n").replace(/[\u2212\u2013]/g, "-");
  const separator = separatorOf(clean);
  const rows = rowsOf(clean, separator);
  const found = columnsOf(rows, turns, separator, decimal);
  const data = found.header ? rows.slice(1) : rows;
  const mark = decimalOf(data, found.columns, separator, decimal);
  const { columns, header, left } = found;
  const how = { separator, decimal: mark.decimal, columns, header, left, doubt: mark.doubt };
  if (found.fault) return { places: [], faults: [found.fault], how };
  const places = [];
  const faults = [];
  for (const row of data) {
    const read = placeOf(row, found.columns, turns, mark);
    (read.code ? faults : places).push(read);
    if (places.length + faults.length > MOST_PLACES) {
      return { places: [], faults: [{ line: row.line, code: "too-many" }], how };
    }
  }
  return { places, faults, how };
}

/**
 * A table to fill in: head line, and one line of each kind that can be asked.
 * @param {number} turns @param {{length: string, angle: string}} unit
 */
export function blankTable(turns, unit) {
  const names = turnNames(turns);
  const down = unit.angle === "rad" ? "3.141593" : "180";
  const filled = turns === 4 ? ["1", "0", "0", "0"] : [down, "0", "0"];
  const [far, near] = { m: ["0.1", "0.05"], in: ["4", "2"] }[unit.length] ?? ["100", "50"];
  const rows = [
    ["name", ...POSITION, ...names, "freedom", "approach"],
    ["pose", "0", "0", far, ...filled, "none", near],
    ["place-alone", "0", far, far, ...names.map(() => ""), "orientation", ""],
  ];
  return rows.map((row) => row.join(",")).join("\r\n") + "\r\n";
}

/** A tab or semicolon wherever there is one, else comma or blanks by where commas stand. */
function separatorOf(text) {
  const lines = text.split("\n", SAMPLE).map((line) => line.replace(/"[^"]*"/g, "").trim())
    .filter((line) => line && line[0] !== "#");
  if (lines.some((line) => line.includes("\t"))) return "tab";
  if (lines.some((line) => line.includes(";"))) return "semicolon";
  const commas = lines.filter((line) => line.includes(","));
  if (!commas.length) return "blank";
  // Commas that all stand between digits, in lines that blanks cut into three and more, are decimal.
  const decimals = commas.every((line) =>
    line.split(/\s+/).length >= 3 && !/(^|[^\d])[,]|,([^\d]|$)|\d,\d+,\d/.test(line));
  return decimals ? "blank" : "comma";
}

/** Cells of each line that is neither blank nor a remark (#), with the number of the line it begins in. */
function rowsOf(text, separator) {
  if (separator === "blank") {
    const cut = (line, at) => ({ line: at + 1, cells: line.trim().split(/\s+/) });
    return text.split("\n").map(cut).filter(told);
  }
  const sign = { tab: "\t", semicolon: ";", comma: "," }[separator];
  const rows = [];
  let number = 1;
  let row = { line: 1, cells: [] };
  let from = 0;
  const finish = () => {
    if (told(row)) rows.push(row);
  };
  while (from <= text.length) {
    const cell = cellAt(text, from, sign);
    row.cells.push(cell.text.trim());
    number += cell.breaks;
    from = cell.end + 1;
    if (text[cell.end] !== sign) {
      finish();
      number += 1;
      row = { line: number, cells: [] };
    }
  }
  return rows;
}

function told(row) {
  return row.cells.some((cell) => cell !== "") && !row.cells[0].startsWith("#");
}

/** One cell that begins at a place of the text, out of its quotes (RFC 4180), and where it ends. */
function cellAt(text, from, sign) {
  let start = from;
  while (text[start] === " ") start += 1;
  if (text[start] === QUOTE) {
    let at = start + 1;
    const isIn = () => text[at] !== QUOTE || text[at + 1] === QUOTE;
    while (at < text.length && isIn()) at += text[at] === QUOTE ? 2 : 1;
    let end = at + 1;
    while (text[end] === " ") end += 1;
    if (at < text.length && (end >= text.length || text[end] === sign || text[end] === "\n")) {
      const inside = text.slice(start + 1, at).replaceAll(QUOTE + QUOTE, QUOTE);
      return { text: inside, end, breaks: inside.split("\n").length - 1 };
    }
  }
  let end = from;
  while (end < text.length && text[end] !== sign && text[end] !== "\n") end += 1;
  return { text: text.slice(from, end), end, breaks: 0 };
}

/** What the columns are: by the head line if there is one, else by how many numbers the widest line has. */
function columnsOf(rows, turns, separator, decimal) {
  const first = rows[0];
  const none = { columns: [], header: false, left: [] };
  if (!first) return none;
  const names = first.cells.map(columnName);
  if (!first.cells.some(isNumberLike) && names.some((name) => POSITION.includes(name))) return byHead(
    first, names, turns);
  const rest = rows.map((row) => trimmed(row.cells));
  const named = rest.some((cells) => cells[0] && !isNumberLike(cells[0]));
  const widest = rest.reduce((most, cells) => Math.max(most, cells.length), 0);
  const behind = widest - 3 - (named ? 1 : 0);
  const fault = { line: first.line, code: "no-columns", text: first.cells.join(" ") };
  if (behind < 0) return { ...none, fault };
  // One number more than a place or a pose needs is a running number in front.
  const numbered = !named && (behind === 1 || behind === turns + 1 || behind === turns + 3);
  const left = behind - (numbered ? 1 : 0);
  const columns = [...(named || numbered ? ["name"] : []), ...POSITION];
  if (left >= turns) columns.push(...turnNames(turns));
  const more = left >= turns ? left - turns : left;
  columns.push(...["freedom", "approach"].slice(0, more));
  if (more > 2) return { ...none, fault: { line: first.line, code: "columns", cell: String(widest) } };
  return { columns, header: false, left: [] };
}

function byHead(first, names, turns) {
  const known = ["name", ...POSITION, ...turnNames(turns), "freedom", "approach"];
  const columns = names.map((name, at) => (known.includes(name) && names.indexOf(name) === at ? name : ""));
  const missing = POSITION.find((name) => !columns.includes(name));
  const part = turnNames(turns).filter((name) => columns.includes(name)).length;
  const left = first.cells.filter((cell, at) => !columns[at] && cell);
  const found = { columns, header: true, left };
  if (missing) return { ...found, fault: { line: first.line, code: "no-column", column: missing } };
  if (part && part < turns) {
    const lost = turnNames(turns).find((name) => !columns.includes(name));
    return { ...found, fault: { line: first.line, code: "no-column", column: lost } };
  }
  return found;
}

/** A column's name without case, and without a unit in brackets or behind it: `X [mm]`, `r1 (deg)`. */
function columnName(cell) {
  return cell.toLowerCase().replace(/[[(].*$/, "").replace(/\s+(mm|cm|m|in|deg|rad|°)\s*$/, "").trim();
}

function turnNames(turns) {
  return ["r1", "r2", "r3", "r4"].slice(0, turns);
}

function trimmed(cells) {
  let end = cells.length;
  while (end > 0 && cells[end - 1] === "") end -= 1;
  return cells.slice(0, end);
}

function isNumberLike(cell) {
  return /^[+-]?[\d.,"\u2019\s\u00a0\u202f]*\d[\d.,"\u2019\s\u00a0\u202f]*(e[+-]?\d+)?$/i.test(cell);
}

/** The decimal mark of a whole table; `doubt` is a number that another country would read as thousands. */
function decimalOf(rows, columns, separator, asked) {
  if (asked !== "auto") return { decimal: asked, doubt: null };
  if (separator === "comma") {
    // Quoted cells may still carry a decimal comma: such a table is told by them.
    if (!rows.some((row) => row.cells.some((cell, at) => isNumeric(columns[at]) && cell.includes(",")))) {
      return { decimal: "point", doubt: null };
    }
  }
  let comma = null;
  let point = false;
  let short = false;
  for (const row of rows) {
    for (let at = 0; at < row.cells.length; at += 1) {
      const cell = row.cells[at];
      if (!isNumeric(columns[at]) || !isNumberLike(cell)) continue;
      const [lastComma, lastPoint] = [cell.lastIndexOf(","), cell.lastIndexOf(".")];
      const both = lastComma > lastPoint ? "comma" : "point";
      if (lastComma >= 0 && lastPoint >= 0) return { decimal: both, doubt: null };
      if (lastComma >= 0) [comma, short] = [comma ?? cell, short || !/^[+-]?\d{1,3}(,\d{3})+$/.test(cell)];
      point ||= lastPoint >= 0;
    }
  }
  if (comma === null) return { decimal: "point", doubt: null };
  if (point) return { decimal: "mixed", doubt: comma };
  return { decimal: "comma", doubt: short ? null : comma };
}

function isNumeric(column) {
  return Boolean(column) && column !== "name" && column !== "freedom";
}

/** A number as written with a decimal mark, groups of three allowed; NaN where it is none. */
function numberOf(cell, decimal) {
  if (cell.length > 40) return NaN;
  const bare = cell.replace(SPACES, " ").trim();
  const match = /^(.*?)(e[+-]?\d{1,3})?$/i.exec(bare);
  const mark = decimal === "comma" ? "," : ".";
  const other = decimal === "comma" ? "." : ",";
  const parts = match[1].split(mark);
  if (parts.length > 2 || (parts[1] ?? "").match(/\D/)) return NaN;
  let [whole] = parts;
  if (whole.includes(other)) {
    if (decimal === "mixed" || !new RegExp(`^[+-]?\\d{1,3}(\\${other}\\d{3})+$`).test(whole)) return NaN;
    whole = whole.replaceAll(other, "");
  }
  if (/^[+-]?$/.test(whole)) whole += parts[1] ? "0" : "x";
  if (!PLAIN.test(whole)) return NaN;
  return Number(`${whole.replace(/['\u2019 ]/g, "")}.${parts[1] || "0"}${match[2] ?? ""}`);
}

/** One line as a place, or the first thing that is wrong with it. */
function placeOf(row, columns, turns, mark) {
  const { line } = row;
  const cells = new Map();
  columns.forEach((column, at) => column && cells.set(column, row.cells[at] ?? ""));
  const name = cells.get("name") || null;
  const beyond = trimmed(row.cells).slice(columns.length);
  if (beyond.length) return { line, name, code: "wide", cell: beyond[0] };
  const numbers = (names) => names.map((name) => numberOf(cells.get(name) ?? "", mark.decimal));
  const wrong = (names, values) => {
    const at = values.findIndex((value) => !Number.isFinite(value));
    if (at < 0) return null;
    const cell = cells.get(names[at]) ?? "";
    const isEither = mark.decimal === "mixed" && cell.includes(",");
    const code = cell === "" ? "empty" : isEither ? "two-ways" : "not-a-number";
    return { line, name, code, column: names[at], cell };
  };
  const position = numbers(POSITION);
  const names = turnNames(turns).filter((name) => columns.includes(name));
  const posed = names.some((name) => cells.get(name) !== "");
  const values = posed ? numbers(names) : null;
  const said = { freedom: cells.get("freedom") ?? "", approach: cells.get("approach") ?? "" };
  const freedom = freedomOf(said.freedom.toLowerCase(), mark.decimal);
  const approach = said.approach === "" ? null : numberOf(said.approach, mark.decimal);
  const fault = wrong(POSITION, position) ?? (posed ? wrong(names, values) : null);
  if (fault) return fault;
  if (freedom === undefined) return { line, name, code: "freedom", cell: said.freedom };
  if (approach !== null && !(approach >= 0)) return { line, name, code: "approach", cell: said.approach };
  if (name && name.length > LONGEST_NAME) return { line, code: "long-name", cell: name.slice(0, 20) };
  return { line, name, position, turns: values, freedom, approach: approach || null };
}

/** What a place leaves open: null where nothing is said, undefined where it cannot be read. */
function freedomOf(said, decimal) {
  if (said === "") return null;
  if (FREEDOMS.has(said)) return said;
  const cone = /^cone[:\s]\s*(.+)$/.exec(said);
  const angle = cone ? numberOf(cone[1], decimal) : NaN;
  return angle > 0 ? { cone: angle } : undefined;
}
