import { MINUS, roundTo } from "./number";

/**
 * The arithmetic of a working as its reader has it: the printed numbers. `null` where a letter or a sum over rows stands
 * among them, which only the table resolves.
 */
export function printedResult(text: string): number | null {
  const tokens = tokensOf(text);
  if (!tokens) return null;
  let at = 0;
  const peek = () => tokens[at];
  const take = () => tokens[at++];

  function sum(): number {
    let value = product();
    while (peek() === "+" || peek() === "-") value += take() === "+" ? product() : -product();
    return value;
  }
  function product(): number {
    let value = factor();
    for (;;) {
      const next = peek();
      if (next === "*") {
        take();
        value *= factor();
      } else if (next === "/") {
        take();
        value /= factor();
      } else if (next !== undefined && (next === "(" || /^(lg|max|min|sqrt)$/.test(next)))
        value *= factor();
      else return value;
    }
  }
  function factor(): number {
    const next = take();
    if (next === "-") return -factor();
    if (next === "lg") return Math.log10(factor());
    if (next === "sqrt") return Math.sqrt(factor());
    if (next === "max" || next === "min") return Math[next](...list());
    if (next === "(") {
      at -= 1;
      const [inner, ...others] = list();
      return raised(others.length === 0 && inner !== undefined ? inner : Number.NaN);
    }
    return raised(next === undefined ? Number.NaN : Number(next));
  }
  function raised(base: number): number {
    if (peek() !== "^") return base;
    take();
    return base ** factor();
  }
  function list(): number[] {
    if (take() !== "(") return [Number.NaN];
    const values = [sum()];
    while (peek() === ",") {
      take();
      values.push(sum());
    }
    return take() === ")" ? values : [Number.NaN];
  }

  const value = sum();
  return at === tokens.length && Number.isFinite(value) ? value : null;
}

const SUPERSCRIPTS = "⁰¹²³⁴⁵⁶⁷⁸⁹";

function tokensOf(text: string): string[] | null {
  const plain = text
    .replace(/[\u00a0\u202f]/g, "")
    .replaceAll(MINUS, "-")
    .replace(/10(⁻?)([⁰¹²³⁴-⁹]+)/g, (_, minus: string, digits: string) => {
      const exponent = [...digits].map((digit) => SUPERSCRIPTS.indexOf(digit)).join("");
      return `10^(${minus ? "-" : ""}${exponent})`;
    })
    .replace(/[·×]/g, "*")
    .replaceAll("√", " sqrt ")
    .replaceAll("%", "")
    .replace(/[≤≥]/g, "");
  const tokens = plain.match(/\d+(?:\.\d+)?|lg|max|min|sqrt|[-+*/^(),]|\S/g) ?? [];
  return tokens.every((token) => /^(\d+(\.\d+)?|lg|max|min|sqrt|[-+*/^(),])$/.test(token))
    ? tokens
    : null;
}

const RELATIONS = / (?:=|≤|≥|<|>|≈) /;

/**
 * Whether a printed equation follows by rounding: the last two members of "… = 80.3 + 1.5 = 81.7" agree in the digits of
 * the result. `null` where it can't be told from the print.
 *
 * @param text with the marks of English: a point, and no mark for thousands but a thin space.
 */
export function followsAsPrinted(text: string): boolean | null {
  const members = text.split(RELATIONS);
  const result = members.at(-1);
  const terms = members.at(-2);
  if (result === undefined || terms === undefined) return null;
  const printed = printedResult(result);
  const computed = printedResult(terms);
  if (printed === null || computed === null) return null;
  const digits = /\.(\d+)\D*$/.exec(result)?.[1]?.length ?? 0;
  return roundTo(computed, digits) === printed;
}

/** Whether a printed test holds: each of its comparisons, and each sum in it, by the printed numbers. */
export function holdsAsPrinted(text: string): boolean | null {
  let isKnown = true;
  for (const clause of text.split(/, /)) {
    const members = clause.split(RELATIONS).map(printedResult);
    const relations = [...clause.matchAll(new RegExp(RELATIONS, "g"))].map(([found]) =>
      found.trim(),
    );
    for (const [index, relation] of relations.entries()) {
      const left = members[index] ?? null;
      const right = members[index + 1] ?? null;
      if (left === null || right === null) isKnown = false;
      else if (!isTrue(left, relation, right)) return false;
    }
  }
  return isKnown ? true : null;
}

function isTrue(left: number, relation: string, right: number): boolean {
  const apart = Math.abs(left - right);
  switch (relation) {
    case ">":
      return left > right;
    case "<":
      return left < right;
    case "≥":
      return left >= right;
    case "≤":
      return left <= right;
    default:
      return apart < 1e-9;
  }
}

const MOST_DIGITS = 6;

/** Decimals of the levels in a working's equation: as few as make the printed numbers follow; two where it can't be told. */
export function equationDigits(
  print: (digits: number) => string,
  least = 1,
  check: (text: string) => boolean | null = followsAsPrinted,
): number {
  for (let digits = least; digits <= MOST_DIGITS; digits += 1) {
    const follows = check(print(digits));
    if (follows === null) return Math.max(least, 2);
    if (follows) return digits;
  }
  return Math.max(least, 2);
}
