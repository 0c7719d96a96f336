import type { I18n } from "@lingui/core";

/** By how much a text is longer than the server takes it. It is said and not cut: nobody loses the end of a note. */
export function tooManyText(i18n: I18n, text: string, most: number): string | undefined {
  const count = text.trim().length - most;
  return count > 0
    ? i18n.t("{count, plural, one {# character too many.} other {# characters too many.}}", {
        count,
      })
    : undefined;
}
