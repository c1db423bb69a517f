// The workbench: what is typed becomes a question, and the answer is shown at once.

import { hasToken } from "./access.js";
import { showAnswer, sentence } from "./answer.js";
import { ask, forget, picture } from "./ask.js";
import { all, el, one, settled } from "./dom.js";
import { wireFile } from "./file.js";
import { clearFaults, showFaults } from "./faults.js";
import { chooseForm, loadFrames, loadNames, named, readNames } from "./frames.js";
import { chosenUnits, empty, loadUnits, numbers, read, unitChoice } from "./fields.js";
import { query, stringify } from "./numbers.js";
import { understand } from "./paste.js";
import * as range from "./range.js";
import { addStep, loadSteps, readSteps, unfinished } from "./steps.js";

/** Milliseconds of quiet before the service is asked. */
const QUIET = 20;
/** Milliseconds more before a fault is shown. */
const PATIENCE = 350;

/** A reading of our own: a probe pair on an orbiting platform, restated for the ground. Invented. */
const EXAMPLE = {
  e: [12.5, 340, -3.75], b: [1200, -450, 44700],
  units: { e: "mV/m", b: "nT", velocity: "km/s", angle: "deg" },
  steps: [
    { rotate: { axis: [0, 0, 1], angle: 30, inverse: true } },
    { boost: { velocity: [7.6, 0, 0], inverse: true } },
  ],
};

const work = one("#work");
const steps = one("#steps");
let asked = null;
let answered = null;

/** What must still be entered before there is a question; nothing when all is there. */
const lacking = (e, b) => (empty(e) && empty(b)
  ? "Enter E, B or both, and how the target moves or is turned. The answer appears here while you type."
  : lackingWay());

/** What must still be entered of the way. */
function lackingWay() {
  if (named()) return "";
  const list = all(".step", steps);
  const blank = list.findIndex(unfinished);
  if (list.length === 0) return "Add a motion or a turn: how does the target move or stand, seen from where you measured?";
  if (blank < 0) return "";
  const more = list.length > 1 ? ", or remove it" : ", or remove it and add a turn";
  return `Fill in step ${blank + 1} of the way${more}.`;
}

/** The units and the way as they stand in the fields. */
function way() {
  const units = chosenUnits(work);
  const answer_units = Object.fromEntries(
    all("#answer-units select").filter((select) => select.value !== "").map((select) => [select.dataset.answer, select.value]));
  return {
    ...(Object.keys(units).length ? { units } : {}),
    ...(Object.keys(answer_units).length ? { answer_units } : {}),
    ...(named() ? readNames() : { steps: readSteps(steps) }),
    ...read(one("#whole")),
  };
}

/** The question as it stands in the fields; null until there is a reading and a way. */
function question() {
  const { e, b, uncertainty } = read(one("#reading-fields"));
  if (lacking(e, b)) return null;
  const known = Object.entries(uncertainty).filter(([, value]) => !empty(value));
  return {
    ...(empty(e) ? {} : { e }),
    ...(empty(b) ? {} : { b }),
    ...way(),
    ...(known.length ? { uncertainty: Object.fromEntries(known) } : {}),
  };
}

async function update() {
  asked = question();
  range.offer(asked ?? {});
  if (!asked) {
    forget("answer");
    clearFaults(work);
    show(null);
    return;
  }
  const post = { method: "POST", headers: { "content-type": "application/json" }, body: stringify(asked) };
  const { answer, problem } = await ask("answer", "/v1/transform", post);
  if (!answer && !problem) return;
  if (problem && !(await still(post.body))) return;
  clearFaults(work);
  if (problem) showFaults(problem, work, one("#other-faults"));
  show(answer ?? null, problem);
  if (answer) await Promise.all([drawPicture(answer), range.draw(asked)]);
}

/** Whether nothing was typed in the meantime: half a number is no fault yet. */
async function still(body) {
  await new Promise((resolve) => setTimeout(resolve, PATIENCE));
  return asked !== null && stringify(asked) === body;
}

/** Shows an answer, or says what is still needed. */
function show(answer, problem) {
  answered = answer;
  one("#answer-parts").hidden = !answer;
  one("#range-section").hidden = !answer;
  one("#waiting").hidden = Boolean(answer);
  const places = problem?.errors.length ?? 0;
  one("#waiting").textContent = problem
    ? `There is no answer yet: ${places > 1 ? `${places} things` : "something"} must be mended, as said beside the fields.`
    : lacking(...Object.values(read(one("#reading-fields"))));
  one("#status").textContent = answer ? sentence(answer) : "";
  if (answer) showAnswer(asked, answer, one("#full").checked);
}

async function drawPicture(answer) {
  const headers = { accept: "image/svg+xml" };
  const drawn = await ask("picture", `/v1/transform?${query(asked)}`, { headers });
  if (drawn.answer) picture(one("#picture"), drawn.answer, `As read and in the target frame. ${sentence(answer)}`);
}

/** Puts a question into the fields. */
function load(given) {
  for (const input of all("#reading input")) {
    input.value = input.dataset.path.split("/").reduce((at, name) => at?.[name], given) ?? "";
  }
  one("#reading details").open = Boolean(given.uncertainty);
  const way = given.steps
    ?? (given.boost ? [{ boost: given.boost }] : given.velocity ? [{ boost: { velocity: given.velocity } }]
      : given.rotation ? [{ rotate: given.rotation }] : null);
  if (way) loadSteps(steps, way);
  if (way || given.from) chooseForm(way ? "steps" : "names");
  if (given.from) loadNames(given);
  one("#whole input").checked = given.inverse === true;
  for (const select of all("select[data-unit]", work)) {
    if (given.units?.[select.dataset.unit]) select.value = given.units[select.dataset.unit];
  }
  for (const select of all("#answer-units select")) select.value = given.answer_units?.[select.dataset.answer] ?? "";
  update();
}

function pasted() {
  const box = one("#paste");
  const note = one("#paste-note");
  try {
    const { question: given, values } = understand(box.value);
    if (given) load(given);
    for (const [path, value] of Object.entries(values ?? {})) one(`#reading [data-path="${path}"]`).value = value;
    const count = Object.keys(values ?? {}).length;
    note.textContent = given ? "Taken over from JSON." : `${count} numbers taken over.`;
    note.className = "hint";
    box.value = "";
    update();
  } catch (error) {
    note.textContent = error.message;
    note.className = "hint fault-text";
  }
}

async function copy(button, text) {
  const words = button.textContent;
  try {
    await navigator.clipboard.writeText(text);
    button.textContent = "Copied";
  } catch {
    window.prompt("Copy this:", text);
  }
  setTimeout(() => { button.textContent = words; }, 1500);
}

const shell = (text) => `'${text.replaceAll("'", "'\\''")}'`;

function wire() {
  const soon = settled(update, QUIET);
  work.addEventListener("input", (event) => {
    if (event.target.closest("#paste-field, #range, #file-drop, #file-way")) return;
    soon();
  });
  one("#paste").addEventListener("paste", () => setTimeout(pasted));
  one("#paste").addEventListener("keydown", (event) => { if (event.key === "Enter") pasted(); });
  one("#add-boost").onclick = () => one("input", addStep(steps, "boost")).focus();
  one("#add-rotate").onclick = () => one("input", addStep(steps, "rotate")).focus();
  one("#way-form").oninput = () => chooseForm(one("#way-form").value);
  one("#example").onclick = () => load(EXAMPLE);
  one("#full").onchange = () => answered && show(answered);
  one("#copy-curl").onclick = (event) =>
    copy(event.target, `curl -s ${hasToken() ? '-H "Authorization: Bearer $TOKEN" ' : ""}${location.origin}/v1/transform --json ${shell(stringify(asked))}`);
  one("#copy-link").onclick = (event) =>
    copy(event.target, `${location.origin}/#${encodeURIComponent(stringify(asked))}`);
  one("#copy-picture").onclick = (event) => copy(event.target, `${location.origin}/v1/transform?${query(asked)}`);
  const redraw = settled(() => range.draw(asked), QUIET);
  one("#range-form").addEventListener("input", (event) => {
    if (event.target.id === "range-over") range.defaults();
    redraw();
  });
  one("#range").addEventListener("toggle", redraw);
  one("#range-save").onclick = () => range.save(asked);
  one("#range-copy").onclick = (event) => copy(event.target, location.origin + range.address(asked));
  wireFile(way, lackingWay);
  window.addEventListener("hashchange", reopen);
}

/** Opens the question that a link carries. */
function reopen() {
  if (location.hash.length < 2) return;
  try {
    load(JSON.parse(decodeURIComponent(location.hash.slice(1))));
  } catch {
    one("#paste-note").textContent = "The link that opened this page is not whole; copy it again.";
  }
}

async function start() {
  await Promise.all([loadUnits(), loadFrames()]);
  const xyz = ["x", "y", "z"];
  one("#reading-fields").append(
    numbers({ label: "E, electric field", path: "e", names: xyz, unit: "e" }),
    numbers({ label: "B, magnetic flux density", path: "b", names: xyz, unit: "b" }),
    el("details", {}, el("summary", {}, "Standard uncertainties"),
      numbers({ label: "of E, in its unit", path: "uncertainty/e", names: xyz }),
      numbers({ label: "of B, in its unit", path: "uncertainty/b", names: xyz })));
  addStep(steps, "boost");
  for (const select of all("#answer-units select")) {
    const codes = [...unitChoice(select.dataset.answer).options].map((option) => option.cloneNode(true));
    select.append(...codes);
  }
  wire();
  reopen();
  update();
}

start();
