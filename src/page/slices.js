// A file as slices of whole rows, and what an answer to one of them holds.

/** Bytes of a slice. A browser reads nothing while it sends, so an answer must fit into what the service keeps for it. */
const SLICE = 256 * 1024;
const NEWLINE = 10, RETURN = 13, QUOTE = 34, COMMA = 44;

/** How the service ends a refused row: its number, then its problem. Inside a text the quotes would be escaped. */
const REFUSED = /"row":(\d+),"problem":\{"type":"\/problems\//g;

/** The places where rows end. In CSV a quoted value may hold line ends. */
function* rowEnds(bytes, csv) {
  let quoted = false;
  for (let i = 0; i < bytes.length; i += 1) {
    if (csv && bytes[i] === QUOTE) quoted = !quoted;
    else if (bytes[i] === NEWLINE && !quoted) yield i + 1;
  }
}

/** Where the last whole row ends; zero when there is none. */
function lastEnd(bytes, csv) {
  if (!csv) return bytes.lastIndexOf(NEWLINE) + 1;
  let end = 0;
  for (const at of rowEnds(bytes, csv)) end = at;
  return end;
}

/** The header of a CSV file, its line end included. */
export async function header(file) {
  for (let size = SLICE; ; size *= 2) {
    const bytes = new Uint8Array(await file.slice(0, size).arrayBuffer());
    const end = rowEnds(bytes, true).next().value;
    if (end || size >= file.size) return bytes.subarray(0, end ?? bytes.length);
  }
}

/** Slices of whole rows from `start` on, with the place where each ends; a longer row makes a longer slice. */
export async function* slices(file, csv, start) {
  let size = SLICE;
  for (let at = start; at < file.size;) {
    const bytes = new Uint8Array(await file.slice(at, at + size).arrayBuffer());
    const end = at + bytes.length >= file.size ? bytes.length : lastEnd(bytes, csv);
    if (end === 0) {
      size *= 2;
      continue;
    }
    size = SLICE;
    at += end;
    yield { rows: bytes.subarray(0, end), end: at };
  }
}

/** The rows of a CSV answer, with its header or without, and how many of them were refused: those with a problem. */
export function csvRows(bytes, withHeader) {
  let [begin, from, read, refused] = [0, 0, 0, 0];
  for (const end of rowEnds(bytes, true)) {
    if (from === 0) begin = end;
    else {
      const last = bytes[end - 2] === RETURN ? end - 3 : end - 2;
      read += 1;
      if (bytes[last] !== COMMA) refused += 1;
    }
    from = end;
  }
  return { rows: withHeader ? bytes : bytes.subarray(begin), read, refused };
}

/** The rows of an NDJSON answer and its last word; the numbers of refused rows count on from `before`. */
export function ndjsonRows(bytes, before) {
  const body = bytes.subarray(0, bytes.lastIndexOf(NEWLINE));
  const start = body.lastIndexOf(NEWLINE) + 1;
  const { read, refused } = JSON.parse(new TextDecoder().decode(body.subarray(start))).end;
  let rows = bytes.subarray(0, start);
  if (refused > 0 && before > 0) {
    const text = new TextDecoder().decode(rows);
    rows = new TextEncoder().encode(text.replace(REFUSED, (_, row) => `"row":${Number(row) + before},"problem":{"type":"/problems/`));
  }
  return { rows, read, refused };
}
