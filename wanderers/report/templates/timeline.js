"use strict";
// The timeline of the report page: a lane a planet, retrograde stretches, stations, oppositions, inferior
// conjunctions and meetings of planets. It stands on page.js: its table, its words, its address.

(() => {
  const { lanes, span, frame } = data.timeline;
  if (!lanes.length) return;

  const YEAR = 365.25 * DAY;
  const SHORTEST = 10 * DAY;
  const [LANE, TOP, AXIS, GUTTER, SIDE] = [38, 10, 46, 76, 24]; // dots
  const BAR = 18;
  const REACH = 14; // dots from a mark within which the pointer means it
  const DRAGGED = 6; // dots from which a press is a drag
  const CLOSE_DEG = 1;
  const ROOM = { turn: 40, middle: 30 }; // dots that a planet's stretches must be wide, so that such a mark fits on them
  const MEETING_ROOM = 150; // dots a year from which meetings are drawn
  const MONTHS = "Jan Feb Mar Apr May Jun Jul Aug Sep Oct Nov Dec".split(" ");
  const SHAPES = {
    retrograde: "M-7-6H1a5 5 0 0 1 0 10H-6m4-4l-4 4l4 4",
    direct: "M7-6H-1a5 5 0 0 0 0 10H6m-4-4l4 4l-4 4",
    opposition: "M-6 0a6 6 0 0 1 12 0a6 6 0 0 1-12 0z",
    inferior: "M-6 0a6 6 0 0 1 12 0a6 6 0 0 1-12 0zM-1 0h2",
    meeting: "M0-6.5L6.5 0L0 6.5L-6.5 0z",
    close: "M0-6.5L6.5 0L0 6.5L-6.5 0z",
  };

  const box = find("#timeline .lanes");
  const laneOf = new Map(lanes.map((lane, number) => [lane.body, number]));
  const height = TOP + LANE * lanes.length + AXIS;
  const view = { from: span[0], to: span[1] };
  let width = 600;

  /** Makes an SVG element. */
  function drawn(tag, attributes = {}, ...children) {
    const made = document.createElementNS("http://www.w3.org/2000/svg", tag);
    for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, value);
    made.append(...children);
    return made;
  }

  // ---- The marks: what is drawn, in order of time ------------------------------------------------------

  /** Returns the mark of a table row, null where the timeline has none for it. */
  function markOf(row) {
    const [kind, detail, lane] = [cell.kind(row), cell.detail(row), laneOf.get(cell.body(row))];
    if (lane === undefined) return null;
    const mark = { row, lane, other: lane, at: time[row], end: time[row] };
    if (kind === "station") return cell.frame(row) === frame ? { ...mark, sort: "turn", shape: detail } : null;
    if (kind === "opposition") return { ...mark, sort: "middle", shape: "opposition" };
    if (kind === "solar_conjunction" && detail === "inferior") return { ...mark, sort: "middle", shape: "inferior" };
    const meets = (kind === "conjunction" && cell.frame(row) === frame) || (kind === "appulse" && detail === "quasi");
    const other = laneOf.get(cell.other(row));
    if (!meets || other === undefined) return null;
    return { ...mark, other, sort: "meeting", shape: "meeting", close: cell.separation_deg(row) < CLOSE_DEG };
  }

  const stretches = lanes.flatMap((lane, number) =>
    lane.stretches.map((stretch) => ({ stretch, lane: number, other: number, at: stretch.ends[0], end: stretch.ends[1], sort: "stretch" })));
  const marks = [...stretches, ...allRows.map(markOf).filter(Boolean)].sort((a, b) => a.at - b.at || a.lane - b.lane);
  let current = marks.find((mark) => mark.end > span[0]) ?? null; // the one that the keyboard stands on
  let lane = current?.lane ?? 0; // along which it walks; a meeting belongs to two
  let kept = null; // the one whose fact stays when the pointer leaves

  const x = (instant) => GUTTER + ((instant - view.from) / (view.to - view.from)) * (width - GUTTER - SIDE);
  const instantAt = (dots) => view.from + ((dots - GUTTER) / (width - GUTTER - SIDE)) * (view.to - view.from);
  const y = (number) => TOP + LANE * (number + 0.5);
  const dotsOf = (length) => (length / (view.to - view.from)) * (width - GUTTER - SIDE);
  const typical = lanes.map(({ stretches: own }) => own.reduce((sum, { ends }) => sum + ends[1] - ends[0], 0) / own.length || YEAR / 4);

  /** Says whether a sort of mark is drawn at this zoom; a closer one shows what is not. */
  function hasRoom({ sort, lane: number }) {
    if (sort === "stretch") return true;
    return sort === "meeting" ? dotsOf(YEAR) >= MEETING_ROOM : dotsOf(typical[number]) >= ROOM[sort];
  }

  const inView = (mark) => mark.end >= view.from && mark.at <= view.to;
  const middleOf = (mark) => (Math.max(mark.at, span[0]) + Math.min(mark.end, span[1])) / 2;
  const runsIn = (mark, number) => mark.lane === number || mark.other === number;
  const whatOf = (mark) => (mark.stretch ? mark.stretch.what : what(mark.row));

  // ---- Drawing -----------------------------------------------------------------------------------------

  const ground = drawn("g", { "aria-hidden": "true", class: "ground" });
  const layers = { stretch: drawn("g", { role: "presentation" }), meeting: drawn("g", { role: "presentation" }), other: drawn("g", { role: "presentation" }) };
  const list = drawn("g", { role: "listbox", "aria-label": "Marks of the timeline", "aria-describedby": "timeline-keys" }, ...Object.values(layers));
  const band = drawn("rect", { class: "band", y: 0, height: height - AXIS, width: 0, "aria-hidden": "true" });
  const hatch = drawn("pattern", { id: "hatch", width: 5, height: 5, patternUnits: "userSpaceOnUse", patternTransform: "rotate(45)" },
    drawn("path", { d: "M1.2 0V5", class: "hatch" }));
  const cut = drawn("rect", { y: 0, height });
  const picture = drawn("svg", { height }, drawn("defs", {}, hatch, drawn("clipPath", { id: "lanes-cut" }, cut)), ground, list, band);

  /** Makes what stands for a mark; where it stands is set by ``place``. */
  function elementOf(mark) {
    const parts = [drawn("rect", { class: "ring", rx: 3 })];
    if (mark.sort === "stretch") parts.push(drawn("rect", { class: "stretch", height: BAR }));
    else if (mark.sort === "meeting") parts.push(drawn("path", { class: "joint" }), shapeOf(mark), shapeOf(mark));
    else parts.push(shapeOf(mark));
    const made = drawn("g", { role: "option", "aria-selected": "false", "aria-label": whatOf(mark), tabindex: -1, class: "mark" }, ...parts);
    made.addEventListener("focus", () => standOn(mark));
    return made;
  }

  const shapeOf = (mark) => shape(mark.close ? "close" : mark.shape);

  /** Makes the shape of a sort of mark, on a rim that keeps it apart from what lies below. */
  const shape = (name) => drawn("g", {}, drawn("path", { d: SHAPES[name], class: "rim" }), drawn("path", { d: SHAPES[name], class: `shape ${name}` }));

  /** Puts a mark where its time and lane are. */
  function place(mark) {
    const [ring, ...parts] = mark.element.children;
    const [start, top] = [mark.sort === "stretch" ? Math.max(x(mark.at), GUTTER) : x(mark.at) - 12, Math.min(mark.lane, mark.other)];
    const wide = mark.sort === "stretch" ? Math.max(Math.min(x(mark.end), width - SIDE) - start, 1.5) : 24;
    const box = { x: start - 1, y: y(top) - 13, width: wide + 2, height: 26 + LANE * Math.abs(mark.lane - mark.other) };
    for (const [name, value] of Object.entries(box)) ring.setAttribute(name, value);
    const put = (part, number) => part.setAttribute("transform", `translate(${x(mark.at)} ${y(number)})`);
    if (mark.sort === "stretch") {
      for (const [name, value] of Object.entries({ x: start, y: y(mark.lane) - BAR / 2, width: wide })) parts[0].setAttribute(name, value);
    } else if (mark.sort === "meeting") {
      parts[0].setAttribute("d", `M${x(mark.at)} ${y(mark.lane)}V${y(mark.other)}`);
      put(parts[1], mark.lane);
      put(parts[2], mark.other);
    } else put(parts[0], mark.lane);
  }

  /** Draws what is in view; elements already there stay, so that the focus does. */
  function draw() {
    width = Math.max(box.clientWidth, 280);
    picture.setAttribute("width", width);
    picture.setAttribute("viewBox", `0 0 ${width} ${height}`);
    for (const [name, value] of Object.entries({ x: GUTTER - 14, width: width - GUTTER - SIDE + 28 })) cut.setAttribute(name, value);
    const visible = marks.filter((mark) => inView(mark) && hasRoom(mark));
    if (!visible.includes(current)) current = visible[0] ?? current;
    for (const [name, layer] of Object.entries(layers)) {
      const wanted = visible.filter((mark) => (mark.sort in layers ? mark.sort : "other") === name);
      for (const mark of wanted) mark.element ??= elementOf(mark);
      const held = new Set(wanted.map((mark) => mark.element));
      for (const child of [...layer.children]) if (!held.has(child)) child.remove();
      let next = layer.firstChild;
      for (const mark of wanted) {
        if (mark.element === next) next = next.nextSibling;
        else layer.insertBefore(mark.element, next);
        mark.element.setAttribute("tabindex", mark === current ? 0 : -1);
        place(mark);
      }
    }
    ground.replaceChildren(...drawnLanes(), ...drawnTicks());
    say(visible);
  }

  const drawnLanes = () => lanes.flatMap(({ label }, number) => [
    drawn("path", { d: `M${GUTTER} ${y(number)}H${width - SIDE}`, class: "lane" }),
    drawn("text", { x: GUTTER - 12, y: y(number), class: "name" }, label),
  ]);

  // ---- The axis ----------------------------------------------------------------------------------------

  /** Returns the instant of a date, whatever its year. */
  const utc = (year, month, day = 1) => new Date(0).setUTCFullYear(year, month, day);

  /** Returns the step between ticks: the shortest whose labels have room. */
  function tickStep() {
    const days = [1, 2, 5, 10].find((count) => dotsOf(count * DAY) >= 32);
    if (days) return { days };
    const months = [1, 3].find((count) => dotsOf((count * YEAR) / 12) >= 34);
    if (months) return { months };
    return { years: [1, 2, 5, 10, 20, 50, 100, 200, 500, 1000, 2000, 5000].find((count) => dotsOf(count * YEAR) >= 46) ?? 10000 };
  }

  /** Returns the ticks in view as instant and label, and the larger units that stand below them. */
  function ticks() {
    const { days, months, years } = tickStep();
    const [first, last] = [new Date(view.from).getUTCFullYear(), new Date(view.to).getUTCFullYear()];
    const small = [];
    const large = [];
    if (years) {
      for (let year = Math.ceil(first / years) * years; year <= last; year += years) small.push([utc(year, 0), yearText(year)]);
    } else for (let year = first; year <= last; year += 1) {
      if (months) large.push([utc(year, 0), utc(year + 1, 0), yearText(year)]);
      for (let month = 0; month < 12; month += months ?? 1) {
        if (months) small.push([utc(year, month), MONTHS[month]]);
        else {
          const end = utc(year, month + 1);
          large.push([utc(year, month), end, `${MONTHS[month]} ${yearText(year)}`]);
          for (let day = 1; utc(year, month, day) + (days * DAY) / 2 < end; day += days) small.push([utc(year, month, day), String(day)]);
        }
      }
    }
    return { small: small.filter(([at]) => at >= view.from && at <= view.to), large: large.filter(([start, end]) => end > view.from && start < view.to) };
  }

  const yearText = (year) => fixed(year, 0);

  function drawnTicks() {
    const foot = TOP + LANE * lanes.length;
    const { small, large } = ticks();
    const lines = small.map(([at]) => drawn("path", { d: `M${x(at)} ${TOP}V${foot + 5}`, class: "tick" }));
    const labels = small.map(([at, text]) => drawn("text", { x: x(at), y: foot + 18, class: "small" }, text));
    const units = large.flatMap(([start, end, text]) => {
      const [left, right] = [Math.max(x(start), GUTTER), Math.min(x(end), width - SIDE)];
      const line = x(start) >= GUTTER ? [drawn("path", { d: `M${left} ${TOP}V${foot + 40}`, class: "unit" })] : [];
      return right - left < text.length * 8.5 ? line : [...line, drawn("text", { x: left + 5, y: foot + 37, class: "large" }, text)];
    });
    return [...lines, ...units, ...labels];
  }

  // ---- Words beside the drawing ------------------------------------------------------------------------

  const dayText = (instant) => dayOf(iso(instant));

  /** Tells which span is in view, and what has no room in it. */
  function say(visible) {
    const few = marks.some((mark) => inView(mark) && !hasRoom(mark));
    find("#timeline .place").textContent = `${dayText(nearestDay(view.from))} to ${dayText(nearestDay(view.to))}: ${visible.length} marks${few ? "; zoom in for more" : ""}.`;
    const whole = view.from <= span[0] && view.to >= span[1];
    const idle = { in: view.to - view.from <= SHORTEST, out: whole, whole, earlier: view.from <= span[0], later: view.to >= span[1] };
    for (const button of findAll("#timeline [data-view]")) button.setAttribute("aria-disabled", String(Boolean(idle[button.dataset.view])));
  }

  /** Returns the parts of a mark's fact: what, when in UTC and locally, what a site sees, what must be said. */
  function factOf(mark) {
    if (mark.stretch) {
      const { what: told, utc: when, local } = mark.stretch;
      return [["strong", `${told}.`], ["span", `${when} UTC`], ["span", local && `${local} local`], ["span", lanes[mark.lane].note, "note"]];
    }
    const { row } = mark;
    const local = data.site ? `${dated(localTime(row))} ${clock(localTime(row))} local` : "";
    const best = data.site && watch(row) ? `Watch ${watch(row)}.` : "";
    const sunward = fixed(cell.elongation_deg(row), 0, "° from the Sun");
    const figures = [constellation(row) && `in ${constellation(row)}`, sunward].filter(Boolean).join(", ");
    return [["strong", `${what(row)}.`], ["span", `${minute(cell.utc(row))} UTC`], ["span", local], ["span", figures],
      ["span", [seen(row), best].filter(Boolean).join(" ")], ["span", (data.site && cell.caution(row)) || note(row), "note"]];
  }

  /** Tells the fact of a mark below the drawing. */
  function tell(mark) {
    for (const held of list.querySelectorAll('[aria-selected="true"]')) held.setAttribute("aria-selected", "false");
    mark.element?.setAttribute("aria-selected", "true");
    find("#timeline .fact").replaceChildren(...factOf(mark).filter(([, text]) => text).map((part) => element(...part)));
    const link = find("#timeline .to-row");
    link.hidden = !mark.stretch?.dossier && mark.stretch !== undefined;
    link.textContent = mark.stretch ? "Its dossier" : "Its row in the table";
    link.setAttribute("href", mark.stretch ? withLook(mark.stretch.dossier) : `#row=${cell.event_id(mark.row)}`);
    const button = find("#timeline .to-table");
    button.hidden = !mark.stretch;
    button.onclick = () => showInTable(mark.at, mark.end, lanes[mark.lane].body);
  }

  /** Filters the table to a span, and to a planet if one is given. */
  function showInTable(from, to, body) {
    state.from = dayText(from);
    state.to = dayText(to + DAY - 1);
    state.body = new Set(body ? [body] : state.body);
    showControls();
    refresh();
    goTo("events");
  }

  // ---- Zooming and moving ------------------------------------------------------------------------------

  /** Shows a span, as far as the report reaches. */
  function look(from, to) {
    const length = Math.min(Math.max(to - from, SHORTEST), span[1] - span[0]);
    const middle = (from + to) / 2;
    view.from = Math.min(Math.max(middle - length / 2, span[0]), span[1] - length);
    view.to = view.from + length;
    const held = list.contains(document.activeElement);
    draw();
    if (held && !list.contains(document.activeElement)) current?.element?.focus({ preventScroll: true });
  }

  /** Zooms about an instant: a factor below 1 comes closer. */
  function zoom(factor, about) {
    const length = Math.min(Math.max((view.to - view.from) * factor, SHORTEST), span[1] - span[0]);
    const part = (about - view.from) / (view.to - view.from);
    look(about - part * length, about + (1 - part) * length);
    keepAddress();
  }

  function move(part) {
    const by = part * (view.to - view.from);
    look(view.from + by, view.to + by);
    keepAddress();
  }

  function wholeSpan() {
    look(...span);
    keepAddress();
  }

  let writing = 0;

  /** Writes the span in view into the address, once it has come to rest. */
  function keepAddress() {
    state.when = view.from <= span[0] && view.to >= span[1] ? "" : whenText();
    clearTimeout(writing);
    writing = setTimeout(writeAddress, 150);
  }

  const nearestDay = (instant) => Math.round(instant / DAY) * DAY;

  /** Returns the span in view as dates: whole months where it is long. */
  function whenText() {
    const days = [view.from, view.to].map(nearestDay);
    const ends = (view.to - view.from > 2 * YEAR ? days.map(nearestMonth) : days).map(dayText);
    return (ends.every((end) => end.endsWith("-01")) ? ends.map((end) => end.slice(0, -3)) : ends).join("..");
  }

  function nearestMonth(instant) {
    const date = new Date(instant);
    return utc(date.getUTCFullYear(), date.getUTCMonth() + (date.getUTCDate() > 15 ? 1 : 0));
  }

  /** Shows the span that the address asks for; the whole one where it asks for none or for nonsense. */
  function readSpan() {
    const [from, to] = state.when.split("..").map(instant);
    if (from < to && to > span[0] && from < span[1]) look(Math.max(from, span[0]), Math.min(to, span[1]));
    else look(...span);
  }

  // ---- Keyboard ----------------------------------------------------------------------------------------

  /** Makes a mark the one that the keyboard stands on, and tells its fact. */
  function standOn(mark) {
    current?.element?.setAttribute("tabindex", -1);
    current = kept = mark;
    if (!runsIn(mark, lane)) lane = mark.lane;
    mark.element.setAttribute("tabindex", 0);
    tell(mark);
  }

  /** Goes to a mark, and with it the keyboard's focus. */
  function goToMark(mark) {
    if (!mark) return;
    bringIntoView(mark);
    mark.element.focus({ preventScroll: true });
  }

  /** Tells the mark before or after the current one, whatever its lane; the focus stays on the button. */
  function turn(step) {
    const mark = kept ? beside(step, () => true) : current;
    if (!mark) return;
    bringIntoView(mark);
    standOn(mark);
  }

  function bringIntoView(mark) {
    if (mark.at < view.from || mark.at > view.to) {
      const half = (view.to - view.from) / 2;
      if (mark.sort !== "stretch" || !inView(mark)) look(middleOf(mark) - half, middleOf(mark) + half);
      keepAddress();
    }
  }

  /** Returns the mark before (-1) or after (1) the current one, of those that fit a rule. */
  function beside(step, fits) {
    const among = marks.filter((mark) => mark === current || (fits(mark) && hasRoom(mark) && mark.end >= span[0] && mark.at <= span[1]));
    return among[among.indexOf(current) + step];
  }

  /** Goes to the nearest mark in view of the next lane that has one. */
  function changeLane(step) {
    for (let number = lane + step; number >= 0 && number < lanes.length; number += step) {
      const among = marks.filter((mark) => runsIn(mark, number) && inView(mark) && hasRoom(mark));
      const away = (mark) => Math.abs(middleOf(mark) - middleOf(current));
      if (!among.length) continue;
      lane = number;
      return goToMark(among.reduce((best, mark) => (away(mark) < away(best) ? mark : best)));
    }
    return undefined;
  }

  function onKey(event) {
    if (event.ctrlKey || event.altKey || event.metaKey || !current) return;
    const about = Math.min(Math.max(middleOf(current), view.from), view.to);
    const acts = {
      ArrowLeft: () => (event.shiftKey ? move(-0.25) : goToMark(beside(-1, (mark) => runsIn(mark, lane)))),
      ArrowRight: () => (event.shiftKey ? move(0.25) : goToMark(beside(1, (mark) => runsIn(mark, lane)))),
      ArrowUp: () => changeLane(-1),
      ArrowDown: () => changeLane(1),
      "+": () => zoom(0.5, about),
      "=": () => zoom(0.5, about),
      "-": () => zoom(2, about),
      Home: wholeSpan,
      Enter: () => [...findAll("#timeline .actions :is(a, .to-table)")].find((part) => !part.hidden)?.focus(),
    };
    if (!(event.key in acts)) return;
    event.preventDefault();
    acts[event.key]();
  }

  // ---- Pointer -----------------------------------------------------------------------------------------

  /** Returns the mark that the pointer means: the nearest of its lane, stretches after all others. */
  function pointed(event) {
    const frameBox = picture.getBoundingClientRect();
    const at = event.clientX - frameBox.left;
    const number = Math.floor((event.clientY - frameBox.top - TOP) / LANE);
    const among = marks.filter((mark) => runsIn(mark, number) && inView(mark) && hasRoom(mark));
    const away = (mark) => (mark.stretch ? Math.max(x(mark.at) - at, at - x(mark.end), 0) + 10 : Math.abs(x(mark.at) - at));
    const best = among.reduce((one, mark) => (one && away(one) <= away(mark) ? one : mark), null);
    return best && away(best) <= REACH ? best : null;
  }

  let pressed = null; // where a drag began, in dots from the left

  function onPress(event) {
    if (event.button !== 0) return;
    pressed = { at: across(event), shift: event.shiftKey, from: view.from, to: view.to };
    picture.setPointerCapture(event.pointerId);
  }

  const across = (event) => Math.min(Math.max(event.clientX - picture.getBoundingClientRect().left, GUTTER), width - SIDE);

  function onPointer(event) {
    if (!pressed) {
      const mark = pointed(event);
      picture.classList.toggle("over", mark !== null);
      if (mark) tell(mark);
      return;
    }
    const by = across(event) - pressed.at;
    pressed.dragged ||= Math.abs(by) > DRAGGED;
    if (!pressed.dragged) return;
    if (pressed.shift) {
      const back = (by / (width - GUTTER - SIDE)) * (pressed.to - pressed.from);
      look(pressed.from - back, pressed.to - back);
    } else {
      band.setAttribute("x", Math.min(pressed.at, pressed.at + by));
      band.setAttribute("width", Math.abs(by));
    }
  }

  function onRelease(event) {
    const begun = pressed;
    endDrag();
    if (!begun) return;
    if (!begun.dragged) {
      const mark = pointed(event);
      if (mark) goToMark(mark);
    } else if (begun.shift) keepAddress();
    else {
      const ends = [begun.at, across(event)].map(instantAt);
      look(Math.min(...ends), Math.max(...ends));
      keepAddress();
    }
  }

  function endDrag() {
    pressed = null;
    band.setAttribute("width", 0);
  }

  function onWheel(event) {
    const lines = event.deltaMode === WheelEvent.DOM_DELTA_LINE ? 16 : 1;
    if (event.ctrlKey) zoom(Math.exp(event.deltaY * lines * 0.003), instantAt(across(event)));
    else if (Math.abs(event.deltaX) > Math.abs(event.deltaY)) move((event.deltaX * lines) / width);
    else return;
    event.preventDefault();
  }

  // ---- Beginning ---------------------------------------------------------------------------------------

  /** Explains the marks with the very shapes that are drawn. */
  function writeKey() {
    const words = [["stretch", "runs backwards"], ["retrograde", "turns retrograde"], ["direct", "turns direct"], ["opposition", "opposition"],
      ["inferior", "inferior conjunction"], ["meeting", "two planets meet"], ["close", `closer than ${CLOSE_DEG}°`]];
    const look = (name) => (name === "stretch" ? drawn("rect", { class: "stretch", x: -13, y: -BAR / 2, width: 26, height: BAR })
      : shape(name));
    find("#timeline .key").replaceChildren(...words.map(([name, text]) => {
      const line = element("li");
      line.append(drawn("svg", { viewBox: "-15 -12 30 24", width: 30, height: 24, "aria-hidden": "true" }, look(name)), text);
      return line;
    }));
  }

  const middle = () => (view.from + view.to) / 2;
  const buttons = {
    in: () => zoom(0.5, middle()),
    out: () => zoom(2, middle()),
    earlier: () => move(-0.5),
    later: () => move(0.5),
    whole: wholeSpan,
    table: () => showInTable(view.from, view.to),
    previous: () => turn(-1),
    next: () => turn(1),
  };
  for (const button of findAll("#timeline [data-view]")) {
    button.addEventListener("click", () => button.getAttribute("aria-disabled") !== "true" && buttons[button.dataset.view]());
  }
  list.addEventListener("keydown", onKey);
  list.setAttribute("clip-path", "url(#lanes-cut)");
  picture.addEventListener("pointerdown", onPress);
  picture.addEventListener("pointermove", onPointer);
  picture.addEventListener("pointerup", onRelease);
  picture.addEventListener("pointercancel", endDrag);
  picture.addEventListener("pointerleave", () => kept && tell(kept));
  picture.addEventListener("wheel", onWheel, { passive: false });
  addEventListener("hashchange", readSpan);
  writeKey();
  box.append(picture);
  readSpan();
  new ResizeObserver(draw).observe(box);
})();
