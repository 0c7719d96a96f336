interface Day {
  readonly date: string;
  readonly levelDb: number | null;
}

const DAY_MS = 86_400_000;
/** 1970 began on a Thursday; a week here begins on Monday. */
const weekOf = (date: string) => Math.floor((Date.parse(date) / DAY_MS + 3) / 7);

/** Of each week the day with the highest level; a week without any level keeps its first day, so that it is read out. */
export function weeksOf(days: readonly Day[]): Day[] {
  const weeks = new Map<number, Day>();
  for (const day of days) {
    const week = weekOf(day.date);
    const known = weeks.get(week);
    if (!known || (day.levelDb !== null && day.levelDb > (known.levelDb ?? -Infinity)))
      weeks.set(week, day);
  }
  return [...weeks.values()];
}
