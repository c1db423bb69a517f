// A file restated: sent slice by slice, so that it may be larger than memory.

import { send } from "./access.js";
import { el, one } from "./dom.js";
import { place } from "./keep.js";
import { query } from "./numbers.js";
import { csvRows, header, ndjsonRows, slices } from "./slices.js";

/** Refused rows that are shown; all are in the answer. */
const SHOWN = 5;

let stop = null;
/** Where the answer is kept that can be saved now. */
let before = null;

const count = (n, word) => `${n.toLocaleString("en")} ${word}${n === 1 ? "" : "s"}`;

/** Whether each row brings its own way. */
const ownWay = () => one("#file-way").value === "row";

/** What is asked of every row; the reading itself comes from the file. */
function asked(way) {
  const { steps, from, to, time, inverse, ...rest } = way;
  return query(ownWay() ? rest : { ...rest, ...(from ? { from, to } : { steps }), ...(inverse ? { inverse } : {}) });
}

/** Sends a file through the service and offers what comes back. */
async function restate(file, way) {
  stop?.abort();
  const control = new AbortController();
  stop = control;
  const done = { read: 0, refused: 0, whole: null };
  let kept = null;
  begin(file);
  try {
    kept = await place();
    await pass(file, `/v1/series?${asked(way)}`, kept, done, control.signal);
    done.whole = await kept.whole();
  } catch (error) {
    if (stop === control) showFaults(error, control.signal.aborted);
  }
  if (stop === control) finish(file, done);
  // The answer before may still be on its way to where it is saved, so it goes only now.
  if (stop === control && done.whole) [kept, before] = [before, kept];
  kept?.drop();
}

/** Sends the slices of a file one after the other, and keeps their answers. */
async function pass(file, path, kept, done, signal) {
  const first = await file.slice(0, 64).text();
  const csv = !first.trimStart().startsWith("{");
  const type = csv ? "text/csv" : "application/x-ndjson";
  const head = csv ? await header(file) : new Uint8Array();
  let empty = true;
  for await (const { rows, end } of slices(file, csv, head.length)) {
    // Bytes and not a Blob, whose memory the browser would keep until it next tidies up.
    const reply = await send(path, { method: "POST", headers: { "content-type": type, accept: type },
      body: joined(head, rows), signal });
    if (!reply.ok) throw await problem(reply);
    const bytes = new Uint8Array(await reply.arrayBuffer());
    const got = csv ? csvRows(bytes, done.read, empty) : ndjsonRows(bytes, done.read);
    await kept.write(got.rows);
    signal.throwIfAborted();
    empty = false;
    done.read += got.read;
    done.refused += got.refused.length;
    showRefused(got.refused);
    one("#file-progress").value = end / file.size;
    one("#file-so-far").textContent = `${count(done.read, "row")} so far, ${done.refused.toLocaleString("en")} of them refused`;
  }
  if (empty) throw { detail: "The file holds no rows." };
  if (csv) return;
  const { read, refused } = done;
  await kept.write(new TextEncoder().encode(`${JSON.stringify({ end: { read, answered: read - refused, refused } })}\n`));
}

/** The first rows that were refused, each with its number in the file and why. */
function showRefused(refused) {
  const list = one("#file-refused");
  for (const { row, words } of refused.slice(0, SHOWN - list.children.length)) {
    list.append(el("li", {}, `Row ${row.toLocaleString("en")}: ${words()}`));
  }
}

function joined(head, rows) {
  const body = new Uint8Array(head.length + rows.length);
  body.set(head);
  body.set(rows, head.length);
  return body;
}

async function problem(reply) {
  const type = reply.headers.get("content-type") ?? "";
  if (type.startsWith("application/problem+json")) return reply.json();
  return { detail: `The service answered with status ${reply.status}.` };
}

function say(words) {
  one("#file-status").textContent = words;
}

function begin(file) {
  one("#file-faults").replaceChildren();
  one("#file-refused").replaceChildren();
  one("#file-result").replaceChildren();
  one("#file-progress").value = 0;
  one("#file-so-far").textContent = "";
  one("#file-running").hidden = false;
  say(`${file.name} is on its way.`);
}

function showFaults(error, stopped = false) {
  const details = stopped ? [] : error.errors?.length
    ? error.errors.map((fault) => `${fault.column ? `Column ${fault.column}: ` : ""}${fault.detail}`)
    : [error.detail ?? (error instanceof TypeError ? "The answer broke off; is the service still running?" : `The browser says: ${error.message}`)];
  one("#file-faults").replaceChildren(...details.map((words) => el("p", { className: "fault" }, words)));
}

function finish(file, done) {
  one("#file-running").hidden = true;
  const rest = done.whole ? "" : ", then it ended early: what there is is not the whole file";
  say(done.read || done.whole
    ? `${count(done.read, "row")} restated, ${done.refused.toLocaleString("en")} of them refused${rest}.` : "Nothing was restated.");
  if (!done.whole) return;
  const [name, ending] = file.name.split(/(\.[^.]*)$/);
  const saved = `${name}-restated${ending ?? ""}`;
  one("#file-result").replaceChildren(el("a", { href: URL.createObjectURL(done.whole), download: saved }, `Save ${saved}`));
}

/** Makes the place where files are dropped; `way` gives the way as it stands, `lacking` what it lacks. */
export function wireFile(way, lacking) {
  const place = one("#file-drop");
  const input = one("#file-input");
  const take = ([file]) => {
    if (!file) return;
    const detail = ownWay() ? "" : lacking();
    if (detail) showFaults({ detail });
    else restate(file, way());
  };
  input.onchange = () => { take(input.files); input.value = ""; };
  place.ondragover = (event) => { event.preventDefault(); place.dataset.over = ""; };
  place.ondragleave = () => { delete place.dataset.over; };
  place.ondrop = (event) => {
    event.preventDefault();
    delete place.dataset.over;
    take(event.dataTransfer.files);
  };
  one("#file-stop").onclick = () => stop?.abort();
}
