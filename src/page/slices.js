// A file as slices of whole rows, and what an answer to one of them holds.

/** Bytes of a slice. A browser reads nothing while it sends, so an answer must fit into what the service keeps for it. */
const SLICE = 256 * 1024;
const NEWLINE = 10, RETURN = 13, QUOTE = 34, COMMA = 44;

/** How the service ends a refused row: its number, then its problem. Inside a text the quotes would be escaped. */
const REFUSED = /"row":(\d+),("problem":\{"type":"\/problems\/.*)/g;

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

/**
 * The rows of a CSV answer, with its header or without; how many of them there are; and of those that were
 * refused, which have a problem in their last field, the number and the words. `before` counts earlier rows.
 */
export function csvRows(bytes, before, withHeader) {
  let [begin, from, read] = [0, 0, 0];
  const refused = [];
  for (const end of rowEnds(bytes, true)) {
    if (from === 0) begin = end;
    else {
      const last = bytes[end - 2] === RETURN ? end - 3 : end - 2;
      read += 1;
      const row = bytes.subarray(from, last + 1);
      if (bytes[last] !== COMMA) refused.push({ row: before + read, words: () => lastField(row) });
    }
    from = end;
  }
  return { rows: withHeader ? bytes : bytes.subarray(begin), read, refused };
}

/** The last field of a CSV row, whose quotes are doubled inside quotes (RFC 4180). */
function lastField(row) {
  const text = new TextDecoder().decode(row);
  const [, quoted, plain] = /,(?:"((?:[^"]|"")*)"|([^",]*))$/.exec(text);
  return quoted?.replaceAll('""', '"') ?? plain;
}

/** The same of an NDJSON answer, whose last row is the service's own count. */
export function ndjsonRows(bytes, before) {
  const start = bytes.lastIndexOf(NEWLINE, bytes.length - 2) + 1;
  const { read } = JSON.parse(new TextDecoder().decode(bytes.subarray(start))).end;
  const refused = [];
  const text = new TextDecoder().decode(bytes.subarray(0, start)).replace(REFUSED, (_, own, problem) => {
    const row = Number(own) + before;
    refused.push({ row, words: () => JSON.parse(`{${problem}`).problem.detail });
    return `"row":${row},${problem}`;
  });
  return { rows: refused.length ? new TextEncoder().encode(text) : bytes.subarray(0, start), read, refused };
}
