import { atLocalTime } from "../../shared/time/zone";

interface Times {
  /** HH:MM; anything else while it is being typed. */
  readonly localStart: string;
  readonly whichHour: "first" | "second" | null;
  readonly lengthMin: number;
}

/** Whether a shift's end still lies ahead. False where its times say nothing yet, or the clock never showed its start. */
export function isEndAhead(
  date: string,
  { localStart, whichHour, lengthMin }: Times,
  timeZone: string,
  nowMs: number,
): boolean {
  if (!/^\d\d:\d\d$/.test(localStart) || !(lengthMin > 0)) return false;
  const local = atLocalTime(date, localStart, timeZone);
  if (local.kind === "skipped") return false;
  const start = local.kind === "one" ? local.instant : local[whichHour ?? "first"];
  return start.getTime() + lengthMin * 60_000 > nowMs;
}
