import type { I18n } from "@lingui/core";

/** Letters that are written from right to left. */
const RIGHT_TO_LEFT = /[\u0590-\u08ff\ufb1d-\ufdff\ufe70-\ufefc]/;
const FIRST_STRONG_ISOLATE = "\u2068";
const POP_ISOLATE = "\u2069";

/** A name that is written from right to left, so that it does not take the date or the figure beside it along. */
export const isolate = (text: string): string =>
  RIGHT_TO_LEFT.test(text) ? `${FIRST_STRONG_ISOLATE}${text}${POP_ISOLATE}` : text;

/** What an i18n object fills into its sentences is isolated, on screens as in mails. */
export function isolateValues(i18n: I18n): void {
  const say = i18n._.bind(i18n) as (...args: unknown[]) => string;
  const saysIsolated = (id: unknown, values?: Record<string, unknown>, options?: unknown) =>
    say(
      id,
      values &&
        Object.fromEntries(
          Object.entries(values).map(([name, value]) => [
            name,
            typeof value === "string" ? isolate(value) : value,
          ]),
        ),
      options,
    );
  i18n._ = saysIsolated as I18n["_"];
  i18n.t = saysIsolated as I18n["t"];
}
