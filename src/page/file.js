// A file restated: sent slice by slice, so that it may be larger than memory.

import { send } from "./access.js";
import { el, one } from "./dom.js";
import { query } from "./numbers.js";
import { csvRows, header, ndjsonRows, slices } from "./slices.js";

/** Answers joined into one part at a time: a browser keeps a few large ones better than many small ones. */
const JOIN = 64;

let stop = null;

const count = (n, word) => `${n.toLocaleString("en")} ${word}${n === 1 ? "" : "s"}`;

/** What is asked of every row; the reading itself comes from the file. */
function asked(way) {
  const own = one("#file-way").value === "row";
  const { steps, from, to, time, inverse, ...rest } = way;
  return query(own ? rest : { ...rest, ...(from ? { from, to } : { steps }), ...(inverse ? { inverse } : {}) });
}

/** Sends a file through the service and offers what comes back. */
export async function restate(file, way) {
  stop?.abort();
  const control = new AbortController();
  stop = control;
  const first = await file.slice(0, 64).text();
  const csv = !first.trimStart().startsWith("{");
  const type = csv ? "text/csv" : "application/x-ndjson";
  const path = `/v1/series?${asked(way)}`;
  const done = { read: 0, refused: 0, parts: [], whole: false };
  begin(file);
  try {
    const head = csv ? await header(file) : new Uint8Array();
    let pending = [];
    let empty = true;
    for await (const { rows, end } of slices(file, csv, head.length)) {
      const reply = await send(path, { method: "POST", headers: { "content-type": type, accept: type },
        body: new Blob([head, rows]), signal: control.signal });
      if (!reply.ok) throw await problem(reply);
      const bytes = new Uint8Array(await reply.arrayBuffer());
      const got = csv ? csvRows(bytes, empty) : ndjsonRows(bytes, done.read);
      pending.push(got.rows);
      empty = false;
      done.read += got.read;
      done.refused += got.refused;
      if (pending.length >= JOIN) {
        done.parts.push(new Blob(pending));
        pending = [];
      }
      one("#file-progress").value = end / file.size;
      say(`${count(done.read, "row")} so far, ${done.refused.toLocaleString("en")} of them refused`);
    }
    if (empty) throw { detail: "The file holds no rows." };
    if (!csv) {
      const { read, refused } = done;
      pending.push(`${JSON.stringify({ end: { read, answered: read - refused, refused } })}\n`);
    }
    done.parts.push(new Blob(pending));
    done.whole = true;
  } catch (error) {
    if (stop !== control) return;
    showFaults(error, control.signal.aborted);
  }
  finish(file, type, done);
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
  one("#file-result").replaceChildren();
  one("#file-progress").value = 0;
  one("#file-running").hidden = false;
  say(`${file.name} is on its way.`);
}

function showFaults(error, stopped) {
  const details = stopped ? [] : error.errors?.length
    ? error.errors.map((fault) => `${fault.column ? `Column ${fault.column}: ` : ""}${fault.detail}`)
    : [error.detail ?? (error instanceof TypeError ? "The answer broke off; is the service still running?" : `The browser says: ${error.message}`)];
  one("#file-faults").replaceChildren(...details.map((words) => el("p", { className: "fault" }, words)));
}

function finish(file, type, done) {
  one("#file-running").hidden = true;
  const rest = done.whole ? "" : ", then it ended early: what there is is not the whole file";
  say(done.read || done.whole
    ? `${count(done.read, "row")} restated, ${done.refused.toLocaleString("en")} of them refused${rest}.` : "Nothing was restated.");
  if (!done.whole) return;
  const result = new Blob(done.parts, { type });
  const [name, ending] = file.name.split(/(\.[^.]*)$/);
  one("#file-result").replaceChildren(
    el("a", { href: URL.createObjectURL(result), download: `${name}-restated${ending ?? ""}` }, `Save ${name}-restated${ending ?? ""}`));
}

/** Makes the place where files are dropped; `way` gives the way as it stands. */
export function wireFile(way) {
  const place = one("#file-drop");
  const input = one("#file-input");
  const take = ([file]) => { if (file) restate(file, way()); };
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
