import type { HistoryEvaluation } from "../../shared/acoustics/history";
import type { ReadingFacts } from "../../shared/schemas/evaluation";

const within = (
  value: number | null | undefined,
  lowest: number,
  highest: number,
): number | null => (value == null || value < lowest || value > highest ? null : value);

/**
 * The readings that a history gives exactly: doses and averages under each of the settings, LCeq, the greatest slow level
 * and the peak. What is only bounded is no reading. One energy reading serves every energy rule.
 */
export function historyReadings(
  { counted }: Pick<HistoryEvaluation, "counted">,
  settings: readonly ReadingFacts["settings"][],
): ReadingFacts[] {
  let hasEnergy = false;
  const readings = settings.flatMap((one, index): ReadingFacts[] => {
    const dose = counted.doses[index];
    if (dose?.bound !== "exact") return [];
    const isEnergy = one.exchangeRateDb === 3 && one.thresholdDb === null;
    if (isEnergy && hasEnergy) return [];
    hasEnergy ||= isEnergy;
    const averageDb = within(isEnergy ? counted.laeq?.levelDb : dose.averageDb, 20, 160);
    return [
      { settings: one, dosePct: dose.dosePct, averageDb, lceqDb: null, lasMaxDb: null, peak: null },
    ];
  });
  const lasMaxDb =
    counted.maxSlow?.bound === "exact" ? within(counted.maxSlow.levelDb, 20, 180) : null;
  const lceqDb = within(counted.lceq?.levelDb, 20, 180);
  // A reading names one peak: the C-weighted one, which most criteria ask for.
  const found = counted.peaks.find(({ weighting }) => weighting === "C") ?? counted.peaks[0];
  const peakDb = within(found?.levelDb, 40, 200);
  const peak = found && peakDb !== null ? { levelDb: peakDb, weighting: found.weighting } : null;
  const [first, ...rest] = readings;
  if (first) return [{ ...first, lasMaxDb, lceqDb, peak }, ...rest];
  const [under] = settings;
  return under && (lasMaxDb !== null || lceqDb !== null || peak !== null)
    ? [{ settings: under, dosePct: null, averageDb: null, lasMaxDb, lceqDb, peak }]
    : [];
}
