// A reading pasted as one line: numbers in a row, CSV with its header, or JSON.

const NAMES = ["ex", "ey", "ez", "bx", "by", "bz"];

/** What a line says: `{question}` for JSON, `{values}` by path for numbers. Throws in plain words. */
export function understand(text) {
  const plain = text.trim();
  if (plain.startsWith("{")) return { question: json(plain) };
  const lines = plain.split(/\r?\n/).filter((line) => line.trim() !== "");
  const rows = lines.map((line) => line.trim().split(/ *[,;\t] *| +/));
  const isNumber = (cell) => cell === "" || Number.isFinite(Number(cell));
  if (rows.length === 1 && rows[0].every(isNumber)) return { values: bare(rows[0]) };
  if (rows.length >= 2 && rows[0].some((cell) => NAMES.includes(cell))) return { values: named(rows[0], rows[1]) };
  throw new Error("This is neither three or six numbers (Ex Ey Ez Bx By Bz), nor a CSV header with one row, nor a JSON object.");
}

function json(text) {
  try {
    return JSON.parse(text);
  } catch (error) {
    throw new Error(`This is not well-formed JSON: ${error.message}.`);
  }
}

function bare(cells) {
  const paths = { 3: ["e/0", "e/1", "e/2"], 6: ["e/0", "e/1", "e/2", "b/0", "b/1", "b/2"] }[cells.length];
  if (!paths) throw new Error(`There are ${cells.length} numbers; three are taken as E, six as E and B.`);
  return Object.fromEntries(paths.map((path, i) => [path, cells[i]]));
}

function named(names, cells) {
  const values = {};
  names.forEach((name, i) => {
    if (NAMES.includes(name)) values[`${name[0]}/${"xyz".indexOf(name[1])}`] = cells[i] ?? "";
  });
  return values;
}
