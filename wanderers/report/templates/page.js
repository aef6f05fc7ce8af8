"use strict";
// The report page's own program: filters, sorts and saves the event table, changes the look. It keeps what
// was chosen in the address after "#", so that an address, once copied, shows the same selection again.
// It reads the tables embedded in the page and asks nothing of any network. The timeline is in timeline.js.

const ROWS_PER_SLICE = 100;
const ROWS_ON_PAPER = 3000;
const ROWS_PREPARED = 2000; // at a time, for the search
const SHOWN_ROWS = "#table tbody tr";
const MANY_FOR_A_CALENDAR = 1000;
const DAY = 86400000; // milliseconds
const TICKS = ["body", "kind", "verdict", "without"];
const FIELDS = ["from", "to", "text", "separation", "elongation", "magnitude"];

const data = JSON.parse(document.getElementById("data").textContent);
const find = (selector) => document.querySelector(selector);
const findAll = (selector) => [...document.querySelectorAll(selector)];

// ---- The table: columns of values; a row is a number -------------------------------------------------

/** Returns a function from row number to value for a column in any of its forms; null means no value. */
function reader(column) {
  if (Array.isArray(column)) return (row) => column[row];
  if ("all" in column) return () => column.all;
  const { words, at, fill } = column;
  return fill ? (row) => words[at[row]] && words[at[row]].replace("{}", fill[row]) : (row) => words[at[row]];
}

const rowCount = data.count;
const allRows = Array.from({ length: rowCount }, (_, row) => row);
const cell = Object.fromEntries(Object.entries(data.columns).map(([name, column]) => [name, reader(column)]));
const what = reader(data.what);
const note = reader(data.note);
const constellation = (row) => data.constellations[cell.constellation(row)] ?? "";

const time = new Float64Array(rowCount); // UTC in milliseconds since 1970
for (const row of allRows) time[row] = row === 0 ? data.utc.start : time[row - 1] + data.utc.steps[row - 1];
const lag = reader(data.lag);
cell.utc = (row) => `${iso(time[row])}Z`;
cell.tt = (row) => iso(time[row] + lag(row));
cell.jd_tt = (row) => ((time[row] + lag(row)) / DAY + 2440587.5).toFixed(8);

/** Prints milliseconds since 1970 as ISO 8601; years beyond 0 to 9999 get a sign and no idle zeros. */
function iso(milliseconds) {
  const text = new Date(milliseconds).toISOString().replace("Z", "");
  return text.replace(/^([+-])0*(\d{4,}-)/, "$1$2");
}

/** Returns milliseconds of a date such as 2027, 2027-03, -0500-01-01 or 2027-03-15T12:00:00Z; NaN if it is none. */
function instant(text) {
  const form = /^([+-]?\d{4,6})(?:-(\d\d)(?:-(\d\d)(?:[T ](\d\d):(\d\d)(?::(\d\d(?:\.\d+)?))?Z?)?)?)?$/;
  const parts = form.exec(text.trim().replace("\u2212", "-"));
  if (!parts) return NaN;
  const [year, month, day, hour, minute, second] = parts.slice(1).map((part, i) => Number(part ?? (i === 1 || i === 2 ? 1 : 0)));
  const date = new Date(0);
  date.setUTCFullYear(year, month - 1, day);
  if (date.getUTCMonth() !== month - 1 || date.getUTCDate() !== day || hour > 23 || minute > 59) return NaN;
  return date.getTime() + ((hour * 60 + minute) * 60 + second) * 1000;
}

/** Returns a number as people write it, decimal comma and true minus sign allowed; NaN if it is none. */
const numeric = (text) => Number(text.replace(",", ".").replace("\u2212", "-"));

const searchTexts = new Array(rowCount);

/** Returns the text of a row that a search looks into; composed when first asked for. */
function searched(row) {
  const compose = () => [what(row), constellation(row), cell.kind(row), cell.detail(row), iso(time[row]), note(row), seen(row)];
  return (searchTexts[row] ??= compose().join(" ").toLowerCase());
}

/** Composes the texts bit by bit, begun when the search field is entered, so that no keystroke waits for them. */
function prepareSearch(row = 0) {
  const end = Math.min(row + ROWS_PREPARED, rowCount);
  for (let one = row; one < end; one += 1) searched(one);
  if (end < rowCount) setTimeout(prepareSearch, 0, end);
}

// ---- What was chosen ---------------------------------------------------------------------------------

const state = { sort: "time", falling: false, slice: 0, look: "auto", at: "", when: "", row: "" };
for (const field of TICKS) state[field] = new Set();
for (const field of FIELDS) state[field] = "";
let selection = allRows;

/** Returns what a site sees of a row in words; nothing without a site. */
function seen(row) {
  if (!data.site) return "";
  const { verdict_reason, circumstances, seen_placement, seen_separation_deg, other } = cell;
  const reason = verdict_reason(row);
  const parts = [`${reason[0].toUpperCase()}${reason.slice(1)}.`];
  if (seen_placement(row)) parts.push(`${named(other(row))} ${seen_separation_deg(row).toFixed(1)}° ${seen_placement(row)}.`);
  if (circumstances(row) && circumstances(row) !== reason) parts.push(`${circumstances(row)}.`);
  return parts.join(" ");
}

const named = (name) => data.designations[name] ?? (name === name.toLowerCase() ? name[0].toUpperCase() + name.slice(1) : name);
const clock = (local) => minute(local.replace(/[+-]\d\d:\d\d$/, "")).slice(-5);
const dayOf = (text) => text.slice(0, text.indexOf("T"));

/** Returns a local date with its weekday, as "Fri 2027-03-05". */
function dated(local) {
  const day = dayOf(local);
  const weekday = new Date(instant(day)).toLocaleDateString("en", { weekday: "short", timeZone: "UTC" });
  return `${weekday} ${day}`;
}

/** Returns when to watch, as "Fri 2027-03-05 18:58–20:41, best 19:10"; past midnight the night is named. */
function watch(row) {
  const [start, best, end] = [cell.window_start_local(row), cell.best_local(row), cell.window_end_local(row)];
  if (best === null || cell.verdict(row) === "not_visible") return "";
  const night = dated(start) === dated(end) ? "" : "night after ";
  return `${night}${dated(start)} ${clock(start)}–${clock(end)}, best\u00a0${clock(best)}`;
}

const sortKeys = {
  time: (row) => time[row],
  local: (row) => time[row],
  watch: (row) => (watch(row) ? Date.parse(cell.best_local(row)) : null),
  verdict: (row) => data.verdicts.indexOf(cell.verdict(row)),
  altitude: (row) => cell.altitude_deg(row),
  what,
  constellation,
  separation: cell.separation_deg,
  elongation: cell.elongation_deg,
  magnitude: cell.magnitude,
  distance: cell.distance_au,
  diameter: cell.diameter_arcsec,
};

/** Returns the filters in force, each with the words that name it and a test of a row. */
function filters() {
  const limit = (field, column, fits, words) => {
    const bound = numeric(state[field]);
    if (state[field] === "" || Number.isNaN(bound)) return null;
    return { words: `${words} ${state[field]}`, test: (row) => column(row) !== null && fits(column(row), bound) };
  };
  const date = (field, fits, words) => {
    const bound = instant(state[field]);
    return Number.isNaN(bound) ? null : { words: `${words} ${state[field]}`, test: (row) => fits(time[row], bound) };
  };
  const ticked = (field, test) =>
    state[field].size === 0 ? null : { words: `${field} ${[...state[field]].join(" or ").replaceAll("_", " ")}`, test };
  const sought = state.text.toLowerCase().split(/\s+/).filter(Boolean);
  return [
    ticked("body", (row) => bodiesOf(row).some((name) => state.body.has(name))),
    ticked("kind", (row) => state.kind.has(cell.kind(row))),
    data.site ? ticked("verdict", (row) => state.verdict.has(cell.verdict(row))) : null,
    state.without.has("moon") ? { words: "without meetings with the Moon", test: (row) => cell.body(row) !== "moon" || cell.other(row) === null } : null,
    state.without.has("stars") ? { words: "without meetings with stars", test: (row) => cell.other(row) === null || wanderers.has(cell.other(row)) } : null,
    state.without.has("glare") ? { words: "without glare", test: (row) => !(cell.elongation_deg(row) < data.glare_deg) || cell.elongation_deg(row) === null } : null,
    date("from", (at, bound) => at >= bound, "from"),
    date("to", (at, bound) => at < bound, "before"),
    sought.length === 0 ? null : { words: `containing “${state.text}”`, test: (row) => sought.every((word) => searched(row).includes(word)) },
    limit("separation", cell.separation_deg, (value, bound) => value <= bound, "separation at most"),
    limit("elongation", cell.elongation_deg, (value, bound) => value >= bound, "degrees from the Sun at least"),
    limit("magnitude", cell.magnitude, (value, bound) => value <= bound, "magnitude at most"),
  ].filter(Boolean);
}

const wanderers = new Set(data.bodies);

/** Returns the bodies of a row; a gathering names them in its detail. */
function bodiesOf(row) {
  const gathered = cell.kind(row) === "gathering" ? cell.detail(row).split("+") : [];
  return [cell.body(row), cell.other(row), ...gathered];
}

/** Applies the filters one after the other, and tells how many rows each of them left out. */
function select() {
  const removed = [];
  selection = allRows;
  for (const filter of filters()) {
    const before = selection.length;
    selection = selection.filter(filter.test);
    removed.push(`${filter.words}: ${before - selection.length}`);
  }
  selection = sorted(selection);
  state.slice = Math.max(0, Math.min(state.slice, Math.ceil(selection.length / ROWS_PER_SLICE) - 1));
  find("#removed").textContent = removed.length ? `Left out by ${removed.join("; ")}.` : "";
}

/** Returns rows in the order chosen; rows without a value come last, equal ones in order of time. */
function sorted(rows) {
  const key = sortKeys[state.sort];
  const way = state.falling ? -1 : 1;
  const values = new Array(rowCount);
  for (const row of rows) values[row] = key(row);
  const lacks = (row) => values[row] === null || values[row] === "";
  const compare = (a, b) => (values[a] < values[b] ? -way : values[a] > values[b] ? way : a - b);
  return [...rows.filter((row) => !lacks(row)).sort(compare), ...rows.filter(lacks)];
}

// ---- Printing rows -----------------------------------------------------------------------------------

const fixed = (value, decimals, unit = "") => (value === null ? "" : value.toFixed(decimals).replace("-", "\u2212") + unit);

/** Prints an angle: degrees, below one arcminutes, below one of those arcseconds. */
function angle(degrees) {
  if (degrees === null) return "";
  if (degrees >= 0.9995) return `${degrees.toFixed(1)}°`;
  return degrees * 60 >= 0.9995 ? `${(degrees * 60).toFixed(0)}′` : `${(degrees * 3600).toFixed(0)}″`;
}

/** Prints an instant to the minute, rounded but never into another day. */
function minute(utc) {
  const [day, clock] = utc.replace("Z", "").split("T");
  const [hours, minutes, seconds] = clock.split(":").map(Number);
  const whole = Math.min(hours * 60 + minutes + (seconds >= 30 ? 1 : 0), 24 * 60 - 1);
  return `${day} ${String(Math.floor(whole / 60)).padStart(2, "0")}:${String(whole % 60).padStart(2, "0")}`;
}

/** Prints the instant of a row by the site's clock, to the minute as in UTC. */
const localTime = (row) => `${cell.local_date(row)}T${cell.local_time(row)}`;
const localMinute = (row) => minute(localTime(row));

/** Prints an apparent size: arcseconds, large ones in arcminutes. */
function size(arcsec) {
  if (arcsec === null) return "";
  return arcsec >= 120 ? `${(arcsec / 60).toFixed(1)}′` : `${arcsec.toFixed(1)}″`;
}

/** Prints a distance from the Earth; the Moon's in kilometres. */
function distance(row) {
  const au = cell.distance_au(row);
  if (au === null) return "";
  if (cell.body(row) !== "moon") return `${au.toFixed(3)} au`;
  return `${Math.round((au * data.au_km) / 100) * 100} km`.replace(/(\d{3}) km/, ",$1 km");
}

const fromSite = [
  { style: "when", text: localMinute },
  { style: "what", text: what, beside: seen, below: (row) => cell.caution(row) ?? note(row) },
  { label: "Watch", text: watch },
  { label: "Seen with", text: (row) => cell.verdict(row).replace("_", " ") },
  { style: "figure", label: "Height", text: (row) => (watch(row) ? fixed(cell.altitude_deg(row), 0, "°") : "") },
  { style: "figure", label: "Apart", text: (row) => angle(cell.separation_deg(row)) },
  { style: "figure", label: "From the Sun", text: (row) => fixed(cell.elongation_deg(row), 1, "°") },
  { style: "figure", label: "Magnitude", text: (row) => fixed(cell.magnitude(row), 1) },
  { style: "when", label: "UTC", text: (row) => minute(cell.utc(row)) },
];

const printed = data.site ? fromSite : [
  { style: "when", text: (row) => minute(cell.utc(row)) },
  { style: "what", text: what, below: note },
  { label: "In", text: constellation },
  { style: "figure", label: "Apart", text: (row) => angle(cell.separation_deg(row)) },
  { style: "figure", label: "From the Sun", text: (row) => fixed(cell.elongation_deg(row), 1, "°") },
  { style: "figure", label: "Magnitude", text: (row) => fixed(cell.magnitude(row), 1) },
  { style: "figure", label: "Distance", text: distance },
  { style: "figure", label: "Size", text: (row) => size(cell.diameter_arcsec(row)) },
];

function element(tag, text, style) {
  const made = document.createElement(tag);
  if (text) made.textContent = text;
  if (style) made.className = style;
  return made;
}

/** Returns one table row. */
function tableRow(row) {
  const line = element("tr");
  line.dataset.id = cell.event_id(row);
  for (const column of printed) {
    const box = element("td", column.text(row), column.style);
    if (column.label) box.dataset.label = column.label;
    const beside = column.beside?.(row);
    if (beside) box.append(element("span", beside, "how"));
    const below = column.below?.(row);
    if (below) box.append(element("span", below, "note"));
    line.append(box);
  }
  return line;
}

/** Fills the table with rows from..to of the selection. */
function fill(from, to) {
  const lines = document.createDocumentFragment();
  for (const row of selection.slice(from, to)) lines.append(tableRow(row));
  find("#table tbody").replaceChildren(lines);
}

/** Shows the slice of the selection that is turned to, and says what it is a slice of. */
function show() {
  const from = state.slice * ROWS_PER_SLICE;
  const to = Math.min(from + ROWS_PER_SLICE, selection.length);
  fill(from, to);
  find("#count").textContent = `${selection.length} of ${rowCount} events`;
  find("#claim").textContent = claim();
  const place = selection.length === 0 ? "Nothing fits these filters" : `${from + 1} to ${to} of ${selection.length}`;
  for (const box of findAll(".pager .place")) box.textContent = place;
  for (const button of findAll(".pager button")) {
    const back = button.dataset.go === "first" || button.dataset.go === "previous";
    button.disabled = back ? state.slice === 0 : to >= selection.length;
  }
  for (const head of findAll("#table th[data-key]")) {
    if (head.dataset.key === state.sort) head.setAttribute("aria-sort", state.falling ? "descending" : "ascending");
    else head.removeAttribute("aria-sort");
  }
}

/** Shows on paper what the screen shows in parts: the whole selection, and what is folded up. */
function showOnPaper() {
  fill(0, ROWS_ON_PAPER);
  for (const folded of findAll("details")) folded.open = true;
}

/** Says, in one line with their number, under which limits the rows shown were found. */
function claim() {
  const limits = filters().map((filter) => filter.words);
  const from = data.site ? `from ${data.site}` : "geocentric";
  return [`${selection.length} of ${rowCount} events`, data.span, from, ...limits].join(" · ");
}

// ---- The address -------------------------------------------------------------------------------------

/** Writes what was chosen after "#". */
function writeAddress() {
  const chosen = new URLSearchParams();
  for (const field of TICKS) if (state[field].size) chosen.set(field, [...state[field]].join(","));
  for (const field of FIELDS) if (state[field]) chosen.set(field, state[field]);
  if (state.sort !== "time" || state.falling) chosen.set("sort", (state.falling ? "-" : "") + state.sort);
  if (state.slice) chosen.set("slice", state.slice + 1);
  if (state.look !== "auto") chosen.set("look", state.look);
  if (state.when) chosen.set("when", state.when);
  if (state.row) chosen.set("row", state.row);
  if (state.at) chosen.set("at", state.at);
  const text = chosen.toString().replaceAll("%2C", ",");
  history.replaceState(null, "", text ? `#${text}` : location.pathname + location.search);
}

/** Reads what was chosen from the address; a bare "#mars" is a place on the page and chooses nothing. */
function readAddress() {
  const text = location.hash.slice(1);
  const chosen = new URLSearchParams(text.includes("=") ? text : "");
  for (const field of TICKS) {
    const known = new Set(findAll(`input[name="${field}"]`).map((box) => box.value));
    state[field] = new Set((chosen.get(field) ?? "").split(",").filter((value) => known.has(value)));
  }
  for (const field of FIELDS) state[field] = chosen.get(field) ?? "";
  const sort = (chosen.get("sort") ?? "").replace(/^-/, "");
  state.sort = sort in sortKeys ? sort : "time";
  state.falling = (chosen.get("sort") ?? "").startsWith("-");
  state.slice = Math.max(0, (Number.parseInt(chosen.get("slice") ?? "1", 10) || 1) - 1);
  state.look = findAll('input[name="look"]').some((box) => box.value === chosen.get("look")) ? chosen.get("look") : "auto";
  state.at = text.includes("=") ? chosen.get("at") ?? "" : text;
  state.when = chosen.get("when") ?? "";
  state.row = chosen.get("row") ?? "";
}

/** Puts what was chosen into the controls. */
function showControls() {
  for (const field of TICKS) for (const box of findAll(`input[name="${field}"]`)) box.checked = state[field].has(box.value);
  for (const field of FIELDS) find(`input[name="${field}"]`).value = state[field];
  for (const box of findAll('input[name="look"]')) box.checked = box.value === state.look;
  showLook();
  markBadFields();
}

/** Shows the look chosen, and lets the links to the dossiers carry it. */
function showLook() {
  document.documentElement.dataset.look = state.look;
  for (const link of findAll('a[href^="seasons/"][href*=".html"]')) link.setAttribute("href", withLook(link.getAttribute("href")));
}

/** Returns the address of another page of the report with the look chosen, which that page reads. */
function withLook(address) {
  const [page] = address.split("#");
  return state.look === "auto" ? page : `${page}#look=${state.look}`;
}

/** Marks the fields whose text is no date or number; such a field filters nothing. */
function markBadFields() {
  for (const field of FIELDS.filter((name) => name !== "text")) {
    const read = field === "from" || field === "to" ? instant : numeric;
    const good = state[field] === "" || !Number.isNaN(read(state[field]));
    find(`input[name="${field}"]`).setAttribute("aria-invalid", String(!good));
  }
}

/** Goes to a part of the page, keyboard focus included. */
function goTo(place) {
  const part = document.getElementById(place);
  if (!part) return;
  part.scrollIntoView();
  part.focus({ preventScroll: true });
}

/** Shows what the address asks for. */
function follow() {
  readAddress();
  showControls();
  select();
  show();
  if (state.row) goToRow(state.row);
  else goTo(state.at);
}

/** Goes to a row of the table by its id; filters that hide it are cleared. */
function goToRow(id) {
  const row = allRows.find((one) => cell.event_id(one) === id);
  if (row === undefined) return;
  if (!selection.includes(row)) clearFilters();
  state.slice = Math.floor(selection.indexOf(row) / ROWS_PER_SLICE);
  show();
  const line = findAll(SHOWN_ROWS).find((one) => one.dataset.id === id);
  line.tabIndex = -1;
  line.scrollIntoView({ block: "center" });
  line.focus({ preventScroll: true });
}

/** Takes over a change of filters: begins again at the first slice. */
function refresh() {
  state.slice = 0;
  state.row = "";
  markBadFields();
  select();
  show();
  writeAddress();
}

// ---- Saving the selection ----------------------------------------------------------------------------

/** Hands a text to the browser as a file. */
function save(text, name, type) {
  const link = element("a");
  link.href = URL.createObjectURL(new Blob([text], { type }));
  link.download = name;
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 10000);
}

/** Returns the selection as CSV: the columns of events.csv, in the order shown. */
function selectionAsCsv() {
  const quoted = (value) => (/[",\r\n]/.test(value) ? `"${value.replaceAll('"', '""')}"` : value);
  const line = (row) => data.names.map((name) => quoted(String(cell[name](row) ?? ""))).join(",");
  return [data.names.join(","), ...selection.map(line), ""].join("\n");
}

/** Returns the report's whole calendar as text. */
async function wholeCalendar() {
  const packed = Uint8Array.from(atob(find("#calendar").textContent.trim()), (letter) => letter.charCodeAt(0));
  return new Response(new Blob([packed]).stream().pipeThrough(new DecompressionStream("gzip"))).text();
}

/** Returns the selection as a calendar: the very entries of the report's calendar file, fewer of them. */
async function selectionAsCalendar() {
  const [head, ...rest] = (await wholeCalendar()).split("BEGIN:VEVENT\r\n");
  const foot = "END:VCALENDAR\r\n";
  const wanted = new Set(selection.map((row) => cell.event_id(row)));
  const idOf = (entry) => /^UID:([^@\r\n]+)/m.exec(entry.replaceAll("\r\n ", ""))[1];
  const entries = rest.map((text) => text.replace(foot, "")).filter((entry) => wanted.has(idOf(entry)));
  return { text: head.replace(foot, "") + entries.map((entry) => `BEGIN:VEVENT\r\n${entry}`).join("") + foot, count: entries.length };
}

async function saveCalendar() {
  const { text, count } = await selectionAsCalendar();
  save(text, `${data.stem}_selection.ics`, "text/calendar");
  const lacking = selection.length - count;
  find("#count").textContent = [
    `${count} events saved as a calendar.`,
    lacking ? `${lacking} of the selection are not in the report's calendar: see Sources.` : "",
    count > MANY_FOR_A_CALENDAR ? `Many calendar programs choke on more than ${MANY_FOR_A_CALENDAR}: better narrow the filters.` : "",
  ].join(" ");
}

// ---- Controls ----------------------------------------------------------------------------------------

function listen() {
  const form = find("form.filters");
  form.addEventListener("submit", (event) => event.preventDefault());
  form.addEventListener("input", (event) => {
    const { name, value, checked, type } = event.target;
    if (type !== "checkbox") state[name] = value.trim();
    else if (checked) state[name].add(value);
    else state[name].delete(value);
    refresh();
  });
  find('input[name="text"]').addEventListener("focus", () => prepareSearch(), { once: true });
  find("#clear").addEventListener("click", () => {
    clearFilters();
    writeAddress();
  });
  find("#save-csv").addEventListener("click", () => save(selectionAsCsv(), `${data.stem}_selection.csv`, "text/csv"));
  find("#save-ics").addEventListener("click", saveCalendar);
  find("#table thead").addEventListener("click", sortByHeading);
  for (const button of findAll(".pager button")) button.addEventListener("click", turnTo);
  for (const box of findAll('input[name="look"]')) box.addEventListener("change", changeLook);
  document.addEventListener("click", goByLink);
  addEventListener("hashchange", follow);
  addEventListener("beforeprint", showOnPaper);
  addEventListener("afterprint", show);
}

function clearFilters() {
  for (const field of TICKS) state[field].clear();
  for (const field of FIELDS) state[field] = "";
  state.slice = 0;
  showControls();
  select();
  show();
}

function sortByHeading(event) {
  const head = event.target.closest("button")?.closest("th");
  if (!head) return;
  state.falling = state.sort === head.dataset.key && !state.falling;
  state.sort = head.dataset.key;
  refresh();
}

function turnTo(event) {
  const last = Math.ceil(selection.length / ROWS_PER_SLICE) - 1;
  state.slice = { first: 0, previous: state.slice - 1, next: state.slice + 1, last }[event.target.dataset.go];
  state.row = "";
  show();
  writeAddress();
}

function changeLook(event) {
  state.look = event.target.value;
  showLook();
  writeAddress();
}

/** Follows a link within the page without losing what the address holds: look, span, and filters if it names none. */
function goByLink(event) {
  const address = event.target.closest('a[href^="#"]')?.getAttribute("href") ?? "";
  if (address.length < 2) return;
  event.preventDefault();
  const wanted = new URLSearchParams(address.includes("=") ? address.slice(1) : "");
  state.row = wanted.get("row") ?? "";
  if (state.row) {
    goToRow(state.row);
    writeAddress();
  } else if (address.includes("=")) {
    if (state.look !== "auto") wanted.set("look", state.look);
    if (state.when) wanted.set("when", state.when);
    location.hash = wanted;
  } else {
    state.at = address.slice(1);
    writeAddress();
    goTo(state.at);
  }
}

document.documentElement.dataset.program = "";
listen();
follow();
