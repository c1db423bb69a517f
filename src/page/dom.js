// Elements, made in one expression each.

let count = 0;

/** A new id for an element that another one refers to. */
export const fresh = () => `id${(count += 1)}`;

/** An element with its properties (names with a dash are attributes) and what it holds. */
export function el(tag, properties = {}, ...children) {
  const element = document.createElement(tag);
  for (const [name, value] of Object.entries(properties)) {
    if (name === "data") Object.assign(element.dataset, value);
    else if (name.includes("-") || name === "role") element.setAttribute(name, value);
    else element[name] = value;
  }
  element.append(...children.filter((child) => child !== null && child !== undefined));
  return element;
}

export const one = (selector, root = document) => root.querySelector(selector);
export const all = (selector, root = document) => [...root.querySelectorAll(selector)];

/** Asks once the last call is this many milliseconds ago. */
export function settled(action, wait) {
  let timer;
  return () => {
    clearTimeout(timer);
    timer = setTimeout(action, wait);
  };
}
