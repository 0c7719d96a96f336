import type {
  BandAttenuation,
  OctaveBandValues,
  ProtectorData,
} from "../../../shared/acoustics/types";
import { OCTAVE_BANDS_HZ, US_LABEL_HZ } from "../../../shared/acoustics/types";

const isNumber = (value: unknown): value is number => typeof value === "number";
const numberOrNull = (value: unknown): number | null => (isNumber(value) ? value : null);
const member = (value: unknown, name: string): unknown =>
  typeof value === "object" && value !== null
    ? (value as Record<string, unknown>)[name]
    : undefined;

/** Eight bands, 63 Hz stated or not. */
function octaves(value: unknown): OctaveBandValues | null {
  return Array.isArray(value) &&
    value.length === OCTAVE_BANDS_HZ.length &&
    (value[0] === null || isNumber(value[0])) &&
    value.slice(1).every(isNumber)
    ? (value as unknown as OctaveBandValues)
    : null;
}

function bandsOf(value: unknown): BandAttenuation | null {
  const meanDb = octaves(member(value, "meanDb"));
  const sdDb = octaves(member(value, "sdDb"));
  return meanDb && sdDb && (meanDb[0] === null) === (sdDb[0] === null) ? { meanDb, sdDb } : null;
}

function usLabelOf(value: unknown): ProtectorData["usLabel"] {
  const [meanDb, sdDb] = [member(value, "meanDb"), member(value, "sdDb")];
  const isWhole = (row: unknown): row is number[] =>
    Array.isArray(row) && row.length === US_LABEL_HZ.length && row.every(isNumber);
  return isWhole(meanDb) && isWhole(sdDb) ? { meanDb, sdDb } : null;
}

/** Two subjects or more, each with the same bands. */
function subjectsOf(value: unknown): readonly OctaveBandValues[] | null {
  if (!Array.isArray(value) || value.length < 2) return null;
  const subjects = value.map(octaves);
  const has63 = subjects[0]?.[0] != null;
  return subjects.every((one) => one !== null && (one[0] !== null) === has63)
    ? (subjects as OctaveBandValues[])
    : null;
}

/** What ratings are compared by. */
export type RatingFacts = Pick<
  ProtectorData,
  "usRatingDb" | "snrDb" | "hDb" | "mDb" | "lDb" | "slc80Db" | "bands" | "usLabel" | "subjectsDb"
>;

/** What a form that is still being typed says so far: whatever is not whole yet, or can't be read, is not stated. */
export function typedFacts(data: unknown): RatingFacts {
  const number = (name: string) => numberOrNull(member(data, name));
  return {
    usRatingDb: number("usRatingDb"),
    snrDb: number("snrDb"),
    hDb: number("hDb"),
    mDb: number("mDb"),
    lDb: number("lDb"),
    slc80Db: number("slc80Db"),
    bands: bandsOf(member(data, "bands")),
    usLabel: usLabelOf(member(data, "usLabel")),
    subjectsDb: subjectsOf(member(data, "subjectsDb")),
  };
}
