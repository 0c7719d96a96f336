/** How a dose's line is told from the others, in print and in grey too: its colour on screen, its dashes everywhere. */
export interface DoseLook {
  readonly colour: "v6" | "v4" | "ink" | "ink-2" | "ink-3" | "rule";
  readonly dash: readonly number[];
}
const DOSE_LOOKS: readonly DoseLook[] = [
  { colour: "v6", dash: [] },
  { colour: "ink-2", dash: [7, 3] },
  { colour: "v4", dash: [2, 2.5] },
  { colour: "rule", dash: [8, 2.5, 2, 2.5] },
  { colour: "ink", dash: [4, 2] },
  { colour: "ink-3", dash: [1, 2] },
];
export const doseLook = (place: number): DoseLook => DOSE_LOOKS[place % DOSE_LOOKS.length]!;

/** Doses stand by ratio: those of several criteria are as far apart at noon as in the evening, and the limit never sinks. */
const LEAST_DOSE_PCT = 1;
export const dosePlace = (pct: number): number => Math.log10(Math.max(pct, LEAST_DOSE_PCT));

/** What the axis of doses reaches to: over the highest, with the limit always on it. */
export const doseAxisTopPct = (highestPct: number): number => 1.3 * Math.max(highestPct, 100);

/** Places of the axis: 1, 2, 5 of every ten; the tens alone carry their figure. */
export function doseTicks(highPct: number): { pct: number; isNamed: boolean }[] {
  const ticks: { pct: number; isNamed: boolean }[] = [];
  for (let decade = LEAST_DOSE_PCT; decade <= highPct; decade *= 10)
    for (const step of [1, 2, 5])
      if (step * decade <= highPct) ticks.push({ pct: step * decade, isNamed: step === 1 });
  return ticks;
}
