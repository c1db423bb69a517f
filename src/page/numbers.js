// Numbers as they are typed, sent and shown. What is typed is sent digit for digit.

/** A number in the digits it was typed in. */
class Digits {
  constructor(text) { this.text = text; }
}

const NUMBER = /^([+-]?)(\d*)(?:\.(\d*))?(?:e([+-]?\d+))?$/i;

/** What stands in a field: nothing (null), a number, or a text that the service will refuse. */
export function typed(text) {
  const plain = text.trim().replaceAll("\u2212", "-");
  if (plain === "") return null;
  const parts = NUMBER.exec(plain);
  if (!parts || !(parts[2] || parts[3])) return plain;
  const [, sign, whole, fraction, power] = parts;
  const digits = (whole || "0").replace(/^0+(?=\d)/, "");
  return new Digits(
    (sign === "-" ? "-" : "") + digits + (fraction ? `.${fraction}` : "") + (power ? `e${power}` : ""),
  );
}

/** JSON text; typed numbers keep their digits. */
export function stringify(value) {
  if (value instanceof Digits) return value.text;
  if (Array.isArray(value)) return `[${value.map(stringify).join(", ")}]`;
  if (value && typeof value === "object") {
    const members = Object.entries(value).map(([name, member]) => `${JSON.stringify(name)}: ${stringify(member)}`);
    return `{${members.join(", ")}}`;
  }
  return JSON.stringify(value);
}

/** The same question as the query of a URL: a parameter is a path joined by dots. */
export function query(question) {
  const pairs = [];
  const walk = (path, value) => {
    if (value === null) return;
    if (Array.isArray(value)) {
      const plain = value.every((item) => item instanceof Digits || typeof item !== "object" || item === null);
      pairs.push([path, plain ? value.map((item) => word(item)).join(",") : stringify(value)]);
    } else if (typeof value === "object" && !(value instanceof Digits)) {
      for (const [name, member] of Object.entries(value)) walk(path ? `${path}.${name}` : name, member);
    } else {
      pairs.push([path, word(value)]);
    }
  };
  walk("", question);
  return pairs
    .map(([name, value]) => `${name}=${encodeURIComponent(value).replace(/%(2C|2F|3A|5B|5D)/g, decodeURIComponent)}`)
    .join("&");
}

function word(value) {
  if (value === null) return "";
  return value instanceof Digits ? value.text : String(value);
}

/** A number to six digits, or to the two digits that its standard uncertainty supports. */
export function rounded(value, uncertainty) {
  if (value === null) return "missing";
  if (!uncertainty) return value === 0 ? "0" : tidy(value, 6);
  const last = Math.floor(Math.log10(uncertainty)) - 1;
  const size = Math.max(Math.floor(Math.log10(Math.abs(value) || uncertainty)), last + 1);
  if (size >= -4 && size < 9 && last > -12) {
    const show = (x) => (last < 0 ? x.toFixed(-last) : String(Math.round(x / 10 ** last) * 10 ** last));
    return `${show(value)} ± ${show(uncertainty)}`;
  }
  const decimals = Math.min(Math.max(size - last, 0), 20);
  const power = 10 ** size;
  return `(${(value / power).toFixed(decimals)} ± ${(uncertainty / power).toFixed(decimals)})e${size}`;
}

function tidy(value, digits) {
  const text = value.toPrecision(digits);
  const [mantissa, power] = text.split("e");
  const short = mantissa.includes(".") ? mantissa.replace(/\.?0+$/, "") : mantissa;
  return power ? `${short}e${Number(power)}` : short;
}
