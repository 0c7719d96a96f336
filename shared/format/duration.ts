import type { Locale } from "../i18n/index";
import { formatNumber, NO_FIGURE, type Parsed, parseNumber } from "./number";

/**
 * Minutes as a person types them: `450`, `7:30`, `7.5h` (`7,5h` where the locale writes a comma), `7h 30`, `90 min`.
 * A bare number is minutes. Fractions of a minute are kept; more than two digits of minutes after a colon are not.
 */
export function parseDuration(text: string, locale: Locale): Parsed<number> {
  const typed = text.trim().toLowerCase();
  if (typed === "") return { kind: "empty" };
  const clock = /^(\d{1,3}):(\d{2})$/.exec(typed);
  if (clock) {
    const minutes = Number(clock[2]);
    return minutes < 60
      ? { kind: "ok", value: Number(clock[1]) * 60 + minutes }
      : { kind: "invalid" };
  }
  const hoursAndMinutes = /^(\d{1,3})\s*h\s*(\d{1,2})\s*(?:min|m)?$/.exec(typed);
  if (hoursAndMinutes) {
    const minutes = Number(hoursAndMinutes[2]);
    return minutes < 60
      ? { kind: "ok", value: Number(hoursAndMinutes[1]) * 60 + minutes }
      : { kind: "invalid" };
  }
  const isHours = /h$|std\.?$/.test(typed);
  const parsed = parseNumber(typed.replace(/\s*(?:h|std\.?|min|m)$/, ""), locale);
  return parsed.kind === "ok" && isHours ? { kind: "ok", value: parsed.value * 60 } : parsed;
}

/** "7 h 30 min", "45 min", "8 h". */
export function formatDuration(durationMin: number | null, locale: Locale): string {
  if (durationMin === null || !Number.isFinite(durationMin)) return NO_FIGURE;
  const whole = Math.round(Math.abs(durationMin));
  const sign = durationMin < 0 && whole > 0 ? "\u2212" : "";
  const hours = Math.floor(whole / 60);
  const minutes = whole % 60;
  const parts = [
    hours > 0 ? `${formatNumber(hours, 0, locale)}\u00a0h` : "",
    minutes > 0 || hours === 0 ? `${minutes}\u00a0min` : "",
  ];
  return sign + parts.filter((part) => part !== "").join("\u00a0");
}

/** Minutes as a bare figure for a column whose head says "min". */
export function formatMinutes(durationMin: number | null, locale: Locale): string {
  return formatNumber(durationMin, 0, locale);
}
