// The one script of the pages. Everything here only makes a page faster: each form works without it,
// and the server's rules are the only rules. Nothing is kept in browser storage.

const all = (selector, root = document) => [...root.querySelectorAll(selector)];
const one = (selector, root = document) => root.querySelector(selector);
const TEXT_BOX = 'input[type="text"]:not([readonly]):not([disabled])';
const DAY_FORMAT = { timeZone: "UTC", day: "numeric", month: "short" };
const NUMBER = /^\s*[-\u2212]?\d+([.,]\d+)?\s*$/;

// ---- Time: the server's clock carried on, in the site's offset ------------------------------------

const stamp = one("[data-server-now]")?.dataset.serverNow;
const arrived = performance.timeOrigin + (performance.getEntriesByType("navigation")[0]?.responseStart ?? 0);
const aheadMs = stamp ? Date.parse(stamp) - arrived : 0;
const now = () => Date.now() + aheadMs;

function siteOffsetMs() {
  const parts = /([+-])(\d\d):(\d\d)$/.exec(stamp ?? "");
  if (parts) return (parts[1] === "-" ? -1 : 1) * (Number(parts[2]) * 60 + Number(parts[3])) * 60_000;
  return stamp ? 0 : -new Date().getTimezoneOffset() * 60_000;
}
const clock = (instant) => new Date(instant + siteOffsetMs()).toISOString().slice(11, 16);
const day = (instant) => new Date(instant + siteOffsetMs()).toLocaleDateString("en-GB", DAY_FORMAT);

function inWords(ms) {
  const seconds = Math.floor(Math.abs(ms) / 1000);
  const parts = [seconds / 86_400, (seconds / 3600) % 24, (seconds / 60) % 60];
  const [days, hours, minutes] = parts.map(Math.floor);
  if (days > 0) return `${days} d ${hours} h`;
  if (hours > 0) return `${hours} h ${minutes} min`;
  return minutes > 0 ? `${minutes} min ${seconds % 60} s` : `${seconds} s`;
}

// ---- The save line ---------------------------------------------------------------------------------

const MARKS = { saved: "mark-signed", saving: "mark-saving", unsaved: "mark-unsaved" };

function saveLine(state, words) {
  for (const line of all("[data-save-line]")) {
    line.dataset.state = state;
    one("use", line)?.setAttribute("href", `#${MARKS[state]}`);
    const text = one("span", line) ?? line;
    if (text.textContent !== words) text.textContent = words;
  }
}

// ---- Readings: each is recorded when its box is left ------------------------------------------------

const RETRY_MS = 3000;
const PATIENCE_MS = 4500;
const RECORDED = 'input:not([type="hidden"]):not([type="file"]):not([data-total]), select';

function valueOf(field) {
  if (field.type === "checkbox") return field.checked ? field.value : "";
  if (field.type !== "radio") return field.value;
  return one(`input[name="${CSS.escape(field.name)}"]:checked`, field.form)?.value ?? "";
}

class Recorder {
  constructor(form) {
    this.form = form;
    this.url = form.getAttribute("action") || location.href;
    this.sent = null; // the request without an answer yet: repeated unchanged, so that it cannot double
    const onServer = (field) => [field.name, field.dataset.recorded ?? valueOf(field)];
    this.known = new Map(this.fields().map(onServer));
    form.addEventListener("focusout", ({ target }) => this.left(target));
    form.addEventListener("change", (event) => event.target.type !== "text" && this.pump());
    form.addEventListener("input", (event) => delete event.target.dataset.wasPasted);
    form.addEventListener("submit", (event) => this.submitting(event));
    document.addEventListener("visibilitychange", () => this.shownOrHidden());
    addEventListener("pagehide", () => this.beacon());
    addEventListener("online", () => this.pump());
  }
  left({ name, dataset, value }) {
    if (dataset.recorded !== undefined && value === dataset.recorded) this.closeReason(name);
    this.pump();
  }
  fields() {
    return all(RECORDED, this.form).filter((field) => field.name && !field.closest(".why"));
  }
  field(name) {
    return this.fields().find((field) => field.name === name);
  }
  why(name) {
    return document.getElementById(`${name}-why`);
  }
  reasons(name) {
    const inputs = all("input", this.why(name) ?? document.createElement("i"));
    return inputs.filter((input) => (input.type === "text" ? input.value : input.checked));
  }
  // A recorded value changes only with a reason: its box opens, the change waits for one press.
  lacksReason(name) {
    const why = this.why(name);
    if (!why || !this.field(name).dataset.recorded) return false;
    why.hidden = false;
    return this.reasons(name).length === 0;
  }
  closeReason(name) {
    if (this.why(name)) this.why(name).hidden = true;
    for (const input of this.reasons(name)) {
      input.checked = false;
      if (input.type === "text") input.value = "";
    }
  }
  changed() {
    const fields = this.fields().filter((field) => valueOf(field) !== this.known.get(field.name));
    return [...new Set(fields.map((field) => field.name))];
  }
  ready() {
    return this.changed().filter((name) => !this.lacksReason(name));
  }
  pack(names) {
    const values = new Map(names.map((name) => [name, valueOf(this.field(name))]));
    const pasted = one("[data-pasted]", this.form);
    if (pasted) pasted.value = names.filter((name) => this.field(name).dataset.wasPasted).join(" ");
    const hidden = all('input[type="hidden"]', this.form).map((field) => [field.name, field.value]);
    const reasons = names.flatMap((name) => this.reasons(name).map((input) => [input.name, input.value]));
    return { values, body: new URLSearchParams([...hidden, ...values, ...reasons]) };
  }
  async pump() {
    if (this.busy) return;
    const names = this.sent ? [] : this.ready();
    if (!this.sent && names.length === 0) return this.drained();
    this.sent ??= this.pack(document.hidden ? names : names.slice(0, 1));
    clearTimeout(this.timer);
    this.busy = true;
    if (!this.failedAt) saveLine("saving", "Saving…");
    const answer = await this.post(this.sent.body);
    this.busy = false;
    if (!answer) return void (this.timer = setTimeout(() => this.pump(), RETRY_MS));
    const { values } = this.sent;
    this.sent = null;
    this.take(await answer.json().catch(() => ({})), values, answer.ok);
    this.pump();
  }
  async post(body) {
    const headers = { Accept: "application/json" };
    const signal = AbortSignal.timeout(PATIENCE_MS);
    try {
      const how = { method: "POST", body, headers, signal, keepalive: true, redirect: "error" };
      const answer = await fetch(this.url, how);
      if (answer.status === 401) this.failed("you are signed out, sign in on another tab");
      else if (answer.status === 429 || answer.status >= 500) this.failed("the server does not answer");
      else return answer;
    } catch {
      this.failed("no connection");
    }
  }
  failed(why) {
    this.failedAt ??= now();
    saveLine("unsaved", `Not saved since ${clock(this.failedAt)} — ${why}, keep this page open`);
  }
  take(told, values, ok) {
    for (const name of ["submission", "version"]) {
      if (told[name] !== undefined && this.form.elements[name]) this.form.elements[name].value = told[name];
    }
    for (const [name, value] of values) {
      this.known.set(name, value);
      this.hint(name, "", false);
      if (!ok) continue;
      this.field(name).dataset.recorded = value;
      this.closeReason(name);
    }
    for (const { name, text } of told.hints ?? told.errors ?? []) this.hint(name, text, !ok);
    for (const { id, text } of told.calculated ?? []) document.getElementById(id)?.replaceChildren(text);
    this.failedAt = null;
    this.refused = !ok || one(".reading-hint.refused", this.form) !== null;
    if (this.refused) saveLine("unsaved", "Not all recorded — see the sentence at the value not taken");
    else saveLine("saved", (this.savedWords = `All saved ${told.saved ?? clock(now())}`));
  }
  hint(name, text, refused) {
    const place = document.getElementById(`${name}-hint`);
    if (!place) return;
    place.textContent = text;
    place.classList.toggle("refused", refused);
  }
  // The button waits for readings on their way; without a connection nothing is sent, nothing is lost.
  submitting(event) {
    if (!this.sent) return void (this.leaving = navigator.onLine);
    event.preventDefault();
    event.stopImmediatePropagation();
    this.pressed = event.submitter ?? "form";
  }
  drained() {
    const { pressed } = this;
    this.pressed = null;
    const waiting = this.changed().length > 0;
    if (waiting) saveLine("unsaved", "Not all recorded — a changed value waits for its reason");
    else if (this.waiting && !this.refused) saveLine("saved", this.savedWords ?? "All saved");
    this.waiting = waiting;
    if (pressed && !this.refused) this.form.requestSubmit(pressed === "form" ? undefined : pressed);
  }
  shownOrHidden() {
    if (document.hidden) this.beacon();
    else if (this.sent) this.pump();
  }
  // The answer to a beacon cannot be read: the same body is posted again on return and gives that answer.
  beacon() {
    const names = this.ready();
    if (this.sent || this.leaving || names.length === 0) return;
    this.sent = this.pack(names);
    navigator.sendBeacon(this.url, this.sent.body);
  }
}

// ---- Forms: a second press within a second is ignored; no connection keeps the page -----------------

function guardSubmit(event) {
  const form = event.target;
  if (form.getAttribute("method") !== "post" || event.defaultPrevented) return;
  const last = Number(form.dataset.pressedAt ?? 0);
  if (Date.now() - last < 1000) return event.preventDefault();
  if (!navigator.onLine) {
    event.preventDefault();
    return saveLine("unsaved", "No connection. Nothing was sent; all you typed is kept on this page");
  }
  form.dataset.pressedAt = String(Date.now());
}

// ---- Grid keys: Enter down, Shift+Enter up, arrows move rows, Esc restores, Ctrl+Enter submits -------

function column(box) {
  const table = box.closest("[data-grid]");
  if (!table) return all(TEXT_BOX, box.form);
  const columns = new Map();
  for (const row of table.tBodies[0].rows) {
    for (const cell of row.cells) {
      const input = one(TEXT_BOX, cell);
      if (input && !columns.has(cell.cellIndex)) columns.set(cell.cellIndex, []);
      if (input) columns.get(cell.cellIndex).push(input);
    }
  }
  return [...columns.keys()].sort((a, b) => a - b).flatMap((index) => columns.get(index));
}

function moveTo(box, steps, stayInColumn) {
  const boxes = column(box);
  const target = boxes[boxes.indexOf(box) + steps];
  const sameColumn = target?.closest("td")?.cellIndex === box.closest("td")?.cellIndex;
  if (!target || (stayInColumn && !sameColumn)) return;
  target.focus();
  target.select();
}

function gridKey(event) {
  const box = event.target;
  if (event.isComposing || !box.matches?.(`form[data-record-each] ${TEXT_BOX}`)) return;
  const { key } = event;
  const submits = key === "Enter" && (event.ctrlKey || event.metaKey);
  if (submits) box.form.requestSubmit(one('button:not([type="button"])', box.form));
  else if (key === "Enter") moveTo(box, event.shiftKey ? -1 : 1, false);
  else if (key === "ArrowDown" || key === "ArrowUp") moveTo(box, key === "ArrowUp" ? -1 : 1, true);
  else if (key === "Escape") box.value = box.dataset.onFocus ?? box.defaultValue;
  else return;
  event.preventDefault();
}

// ---- Pasting a block: a preview first, and whole or not at all ---------------------------------------

function blockTargets(box, lines) {
  const row = box.closest("tr");
  const rows = [...row.parentNode.rows].slice(row.sectionRowIndex);
  const columnOf = (cells, from) => cells.filter((cell) => cell.cellIndex >= from && one(TEXT_BOX, cell));
  return lines.flatMap((line, down) => {
    const cells = rows[down] ? columnOf([...rows[down].cells], box.closest("td").cellIndex) : [];
    const boxAt = (right) => cells[right] && one(TEXT_BOX, cells[right]);
    return line.map((text, right) => ({ text: text.trim(), box: boxAt(right) }));
  });
}

function judge({ text, box }) {
  if (!NUMBER.test(text)) return "not a number";
  const value = Number(text.replace("\u2212", "-").replace(",", "."));
  if (box.dataset.low && value < Number(box.dataset.low)) return `below ${box.dataset.low}`;
  if (box.dataset.high && value > Number(box.dataset.high)) return `above ${box.dataset.high}`;
  return "";
}

function element(name, text = "", kind = "") {
  return Object.assign(document.createElement(name), { textContent: text, className: kind });
}

function button(words, act) {
  return Object.assign(element("button", words, "button"), { type: "button", onclick: act });
}

function panelAfter(box, heading) {
  one(".paste-preview")?.remove();
  const panel = element("section", "", "paste-preview");
  panel.append(element("h3", heading));
  box.closest(".wide, form").after(panel);
  return panel;
}

function previewTable(cells) {
  const rows = cells.map(({ box, text, fault }) => {
    const row = element("tr");
    const words = fault ? `${fault}: this box is left as it is` : "will be filled";
    const name = box.getAttribute("aria-label");
    row.append(element("td", name), element("td", text, "num"), element("td", words));
    return row;
  });
  const table = element("table");
  table.createCaption().textContent = "What the block would fill";
  table.createTBody().append(...rows);
  return table;
}

function pasteBlock(event) {
  const box = event.target;
  const text = event.clipboardData?.getData("text/plain").replace(/\r?\n$/, "") ?? "";
  if (!/[\t\n]/.test(text) || !box.matches?.(`[data-grid] ${TEXT_BOX}`)) return;
  event.preventDefault();
  const cells = blockTargets(box, text.split(/\r?\n/).map((line) => line.split("\t")));
  const fits = cells.every((cell) => cell.box);
  for (const cell of fits ? cells : []) cell.fault = judge(cell);
  const bad = cells.filter((cell) => cell.fault).length;
  const counts = `${cells.length} cells: ${cells.length - bad} readable, ${bad} not. Nothing is filled yet.`;
  const tooLarge = "The block is larger than the boxes from here on. Nothing was filled.";
  const panel = panelAfter(box, fits ? counts : tooLarge);
  const close = () => { panel.remove(); box.focus(); };
  const acts = element("div", "", "acts");
  if (fits) acts.append(button("Fill these boxes", () => { fillCells(cells); close(); }));
  acts.append(button("Leave the boxes as they are", close));
  panel.append(...(fits ? [previewTable(cells)] : []), acts);
  acts.firstChild.focus();
}

function fillCells(cells) {
  for (const { box, text, fault } of cells) {
    if (fault) continue;
    box.value = text;
    box.dataset.wasPasted = "yes";
  }
  recorders.get(cells[0].box.form)?.pump();
}

// ---- Inversions: one press or one beat is one; the total goes into the number box --------------------

class Counter {
  constructor(form) {
    this.form = form;
    this.periodMs = 60_000 / Number(form.dataset.beatPerMinute || 60);
    this.cap = Number(form.dataset.cap || Infinity);
    this.total = one("[data-total]", form);
    this.switch = one("[data-beat-switch]", form);
    this.count = Number(this.total.value) || 0;
    one("[data-plus]", form).addEventListener("click", () => this.set(this.count + 1));
    one("[data-undo]", form).addEventListener("click", () => this.set(this.count - 1));
    this.total.addEventListener("input", () => this.set(Number(this.total.value) || 0, true));
    this.switch?.addEventListener("click", () => (this.start ? this.stop() : this.begin()));
    document.addEventListener("keydown", (event) => this.key(event));
    document.addEventListener("keyup", (event) => this.swallowed === event.key && event.preventDefault());
    document.addEventListener("visibilitychange", () => document.hidden && this.stop());
    form.addEventListener("submit", () => this.stop());
    this.set(this.count, true);
  }
  set(count, typed = false) {
    this.count = Math.min(Math.max(count, 0), this.cap);
    one("[data-count]", this.form).textContent = this.count;
    this.form.toggleAttribute("data-capped", this.count >= this.cap);
    if (!typed) this.total.value = this.count;
  }
  begin() {
    this.start = performance.now();
    this.base = this.count;
    this.switch.textContent = "Stop the beat";
    this.tick();
  }
  tick() {
    if (!this.start) return;
    const beats = Math.floor((performance.now() - this.start) / this.periodMs);
    const beat = one("[data-beat]", this.form);
    if (beat) beat.dataset.on = beats % 2;
    if (this.base + beats !== this.count) this.set(this.base + beats);
    if (this.count >= this.cap) return this.stop();
    requestAnimationFrame(() => this.tick());
  }
  stop() {
    if (!this.start) return;
    this.start = null;
    this.switch.textContent = "Start the beat";
    delete one("[data-beat]", this.form)?.dataset.on;
  }
  // A pedal is a keyboard that sends space, Enter or Page Down. A key held down is one press.
  key(event) {
    if (event.repeat && event.target.closest?.("[data-plus]")) return event.preventDefault();
    this.swallowed = null;
    if (!this.start || ![" ", "Enter", "PageDown"].includes(event.key)) return;
    event.preventDefault();
    this.swallowed = event.key;
    this.stop();
  }
}

// ---- Planned readings: time left in words, a flashing shape, the title ------------------------------

const title = document.title;

function showTimers() {
  const due = [];
  for (const item of all("[data-due-at]")) {
    const left = Date.parse(item.dataset.dueAt) - now();
    const phase = left > 60_000 ? "waiting" : left > 0 ? "soon" : left > -60_000 ? "due" : "late";
    const words = { due: "due now", late: `${inWords(left)} late` }[phase] ?? `in ${inWords(left)}`;
    const at = Date.parse(item.dataset.dueAt);
    const when = day(at) === day(now()) ? clock(at) : `${day(at)}, ${clock(at)}`;
    one("[data-left]", item).textContent = `${words} (${when})`;
    if (left <= 0) due.push(item.dataset.dueName);
    if (left <= 0 && item.dataset.phase !== phase) announce(`${item.dataset.dueName}: ${words}`);
    item.dataset.phase = phase;
    one("use", item)?.setAttribute("href", left > 0 ? "#mark-timer" : "#mark-due");
    openWhenDue(one("[data-open-at]", item));
  }
  const flash = due.length > 0 && Math.floor(Date.now() / 1000) % 2 === 0;
  document.title = flash ? `● Read now: ${due[0]}` : title;
}

// A reading is taken from its allowed minute on; the page itself comes anew, with the box of the reading.
function openWhenDue(link) {
  if (!link?.hidden || Date.parse(link.dataset.openAt) > now()) return;
  link.hidden = false;
  link.addEventListener("click", () => {
    if (link.pathname + link.search !== location.pathname + location.search) return;
    location.hash = link.hash;
    location.reload();
  });
}

function announce(words) {
  const place = one("[data-timer-news]");
  if (place) place.textContent = words;
}

// ---- Three clicks on a photo: base, interface, fill line ---------------------------------------------

const MARK_WORDS = { base: "base", interface: "interface", fill: "fill line" };
const STEP = 0.002;
const NUDGES = { ArrowUp: [0, -STEP], ArrowDown: [0, STEP], ArrowLeft: [-STEP, 0], ArrowRight: [STEP, 0] };

class PhotoMarks {
  constructor(figure) {
    this.figure = figure;
    this.buttons = all("[data-mark]", figure);
    this.pick(this.buttons[0]);
    one("img", figure).addEventListener("click", (event) => this.clicked(event));
    for (const button of this.buttons) {
      button.addEventListener("click", () => this.pick(button));
      button.addEventListener("keydown", (event) => this.nudge(event, button));
    }
    figure.addEventListener("input", () => this.draw());
    this.draw();
  }
  pick(button) {
    for (const other of this.buttons) other.setAttribute("aria-pressed", String(other === button));
    this.current = button.dataset.mark;
  }
  input(axis, mark = this.current) {
    return one(`[data-mark-${axis}="${mark}"]`, this.figure);
  }
  place(x, y) {
    const fraction = (value) => Math.min(Math.max(value, 0), 1).toFixed(4);
    this.input("x").value = fraction(x);
    this.input("y").value = fraction(y);
    this.draw();
  }
  clicked(event) {
    const frame = event.target.getBoundingClientRect();
    this.place((event.clientX - frame.left) / frame.width, (event.clientY - frame.top) / frame.height);
    const next = this.buttons[this.buttons.findIndex((button) => button.dataset.mark === this.current) + 1];
    if (next) this.pick(next);
  }
  nudge(event, button) {
    const step = NUDGES[event.key];
    if (!step) return;
    event.preventDefault();
    this.pick(button);
    const from = (axis) => Number(this.input(axis).value || 0.5);
    this.place(from("x") + step[0], from("y") + step[1]);
  }
  draw() {
    const drawing = one("svg", this.figure);
    drawing.replaceChildren();
    for (const [mark, word] of Object.entries(MARK_WORDS)) {
      const [x, y] = ["x", "y"].map((axis) => Number(this.input(axis, mark)?.value || NaN) * 1000);
      if (Number.isNaN(x + y)) continue;
      for (const kind of ["under", "over"]) {
        drawing.append(svg("line", { class: kind, x1: 0, x2: 1000, y1: y, y2: y }));
        drawing.append(svg("line", { class: kind, x1: x, x2: x, y1: y - 25, y2: y + 25 }));
      }
      drawing.append(Object.assign(svg("text", { x: 12, y: y - 10 }), { textContent: word }));
    }
  }
}

function svg(name, attributes) {
  const node = document.createElementNS("http://www.w3.org/2000/svg", name);
  for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, value);
  return node;
}

// ---- Small things: theme, password, details on paper, focus on the error summary ---------------------

const systemDark = matchMedia("(prefers-color-scheme: dark)");
const theme = () => document.documentElement.dataset.theme ?? (systemDark.matches ? "dark" : "light");

function themeSwitch(press) {
  const name = () => { press.textContent = theme() === "dark" ? "Light theme" : "Dark theme"; };
  press.addEventListener("click", () => {
    const next = theme() === "dark" ? "light" : "dark";
    document.documentElement.dataset.theme = next;
    const secure = location.protocol === "https:" ? "; secure" : "";
    document.cookie = `theme=${next}; path=/; max-age=31536000; samesite=lax${secure}`;
    name();
  });
  systemDark.addEventListener("change", name);
  name();
}

function showPassword(button) {
  button.addEventListener("click", () => {
    const field = document.getElementById(button.dataset.show);
    field.type = field.type === "password" ? "text" : "password";
    button.textContent = field.type === "password" ? "Show" : "Hide";
  });
}

document.documentElement.classList.add("scripted");
const recorders = new Map(all("form[data-record-each]").map((form) => [form, new Recorder(form)]));
all("[data-counter]").forEach((form) => new Counter(form));
all("[data-photo-marks]").forEach((figure) => new PhotoMarks(figure));
all("[data-theme-switch]").forEach(themeSwitch);
all("[data-show]").forEach(showPassword);
document.addEventListener("submit", guardSubmit);
document.addEventListener("keydown", gridKey);
document.addEventListener("paste", pasteBlock);
document.addEventListener("focusin", ({ target }) => {
  if (target.matches?.(TEXT_BOX)) target.dataset.onFocus = target.value;
});
if (one("[data-due-at]")) showTimers(), setInterval(showTimers, 1000);
one("[data-focus]")?.focus();
addEventListener("beforeprint", () => all("details").forEach((fold) => { fold.open = true; }));
addEventListener("pageshow", () => {
  for (const form of all("form")) delete form.dataset.pressedAt;
  for (const recorder of recorders.values()) recorder.leaving = false;
});
