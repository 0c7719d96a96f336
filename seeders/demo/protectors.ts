import type { z } from "zod";
import type { ProtectorKind } from "../../shared/acoustics/types";
import type { Active } from "../../shared/schemas/evaluation";
import type { ProtectorUse, RegisterData } from "../../shared/schemas/protector";

export interface DemoProtector {
  name: string;
  kind: ProtectorKind;
  data: z.input<typeof RegisterData>;
}

type Bands = [number, number, number, number, number, number, number, number];
type ActivePart = z.input<typeof Active>;
type Use = Partial<z.input<typeof ProtectorUse>> & Pick<z.input<typeof RegisterData>, "percentile">;
interface Labels {
  usRatingDb: number | null;
  snrDb: number | null;
  hml: [number, number, number] | null;
  slc80Db: number | null;
}

const protector = (
  name: string,
  kind: ProtectorKind,
  labels: Labels,
  meanDb: Bands | null,
  sdDb: Bands | null,
  use: Use = {},
  active: ActivePart | null = null,
): DemoProtector => {
  const [hDb = null, mDb = null, lDb = null] = labels.hml ?? [];
  return {
    name,
    kind,
    data: {
      usRatingDb: labels.usRatingDb,
      snrDb: labels.snrDb,
      hDb,
      mDb,
      lDb,
      slc80Db: labels.slc80Db,
      bands: meanDb && sdDb ? { meanDb, sdDb } : null,
      active,
      ...use,
    },
  };
};

/** Active attenuation by band as a test report gives it: large at the low end, a little noise added at 2 kHz. */
const ternPart: ActivePart = {
  attenuationDb: [9, 17, 20, 15, 5, -2, 0, 0],
  delayS: null,
  gain: null,
  maximumDb: 22,
  bandwidthHz: 1000,
  saturatesAboveDb: 112,
  batteryMin: 420,
};
/** Given by its delay and gain only. */
const wrenPart: ActivePart = {
  attenuationDb: null,
  delayS: 0.00009,
  gain: 0.9,
  maximumDb: 18,
  bandwidthHz: 1500,
  saturatesAboveDb: 115,
  batteryMin: 200,
};

/** Octave bands 63 Hz to 8 kHz: mean and standard deviation over the test subjects, dB. */
export const PROTECTORS: readonly DemoProtector[] = [
  protector(
    "Fenmuff",
    "earmuff",
    { usRatingDb: 28, snrDb: 33, hml: [35, 31, 23], slc80Db: 31 },
    [19, 18, 25, 33, 38, 37, 39, 38],
    [3, 2.5, 2.5, 2.5, 2.5, 3, 3, 3.5],
    { worksWith: { helmet: false, glasses: true, respirator: true }, cushionsEveryDays: 180 },
  ),
  protector(
    "Fenmuff low",
    "earmuff",
    { usRatingDb: 23, snrDb: 28, hml: [32, 25, 17], slc80Db: 26 },
    [14, 12, 18, 26, 32, 33, 36, 35],
    [2.8, 2.4, 2.3, 2.4, 2.5, 2.6, 3, 3.2],
    { worksWith: { helmet: false, glasses: true, respirator: true }, cushionsEveryDays: 180 },
  ),
  protector(
    "Marsh cap",
    "helmet-earmuff",
    { usRatingDb: 22, snrDb: 26, hml: [30, 24, 16], slc80Db: null },
    [13, 12, 17, 25, 31, 32, 34, 33],
    [3.2, 2.6, 2.5, 2.7, 2.8, 3, 3.2, 3.6],
    { worksWith: { helmet: true, glasses: true, respirator: null }, cushionsEveryDays: 180 },
  ),
  protector(
    "Alder foam",
    "foam-plug",
    { usRatingDb: 30, snrDb: 33, hml: [34, 30, 27], slc80Db: 24 },
    [30, 30, 31, 34, 36, 37, 42, 44],
    [6, 6, 6, 6, 5, 4.5, 5, 5],
    {
      sizes: ["S", "M"],
      worksWith: { helmet: true, glasses: true, respirator: true },
      percentile: { mostDb: 24, fewDb: 32 },
    },
  ),
  protector(
    "Willow plug",
    "premoulded-plug",
    { usRatingDb: 24, snrDb: 26, hml: [27, 23, 21], slc80Db: null },
    [24, 23, 24, 25, 27, 31, 33, 38],
    [5, 4.8, 4.6, 4.5, 4.2, 4, 4.6, 5],
    {
      sizes: ["S", "M", "L"],
      worksWith: { helmet: true, glasses: true, respirator: true },
      tipsEveryDays: 90,
    },
  ),
  protector(
    "Heron custom",
    "custom-plug",
    { usRatingDb: null, snrDb: 28, hml: [30, 25, 22], slc80Db: null },
    [25, 25, 25, 26, 28, 33, 36, 39],
    [4, 3.8, 3.8, 3.6, 3.4, 3.5, 4, 4.2],
    { worksWith: { helmet: true, glasses: true, respirator: true } },
  ),
  protector(
    "Sedge band",
    "banded-plug",
    { usRatingDb: 17, snrDb: 18, hml: [21, 14, 11], slc80Db: null },
    [14, 13, 13, 14, 17, 26, 29, 33],
    [4, 3.8, 3.6, 3.5, 3.4, 3.6, 4, 4.5],
    { worksWith: { helmet: true, glasses: true, respirator: null }, tipsEveryDays: 180 },
  ),
  protector(
    "Rush level",
    "level-dependent",
    { usRatingDb: 22, snrDb: 28, hml: [30, 25, 18], slc80Db: null },
    [15, 14, 19, 27, 31, 31, 36, 36],
    [3, 2.6, 2.5, 2.6, 2.7, 2.8, 3.2, 3.5],
    { worksWith: { helmet: false, glasses: true, respirator: true }, cushionsEveryDays: 180 },
  ),
  protector(
    "Curlew headset",
    "communication-headset",
    { usRatingDb: 23, snrDb: 28, hml: [31, 26, 18], slc80Db: null },
    [15, 14, 19, 27, 31, 32, 36, 35],
    [3, 2.6, 2.5, 2.6, 2.7, 2.8, 3.2, 3.5],
    { worksWith: { helmet: false, glasses: true, respirator: null }, cushionsEveryDays: 180 },
  ),
  protector(
    "Tern active",
    "active-earmuff",
    { usRatingDb: 20, snrDb: 25, hml: [31, 22, 14], slc80Db: null },
    [12, 10, 14, 23, 30, 32, 36, 35],
    [3, 2.6, 2.4, 2.5, 2.6, 2.8, 3, 3.4],
    { worksWith: { helmet: false, glasses: true, respirator: true }, cushionsEveryDays: 180 },
    ternPart,
  ),
  protector(
    "Wren active",
    "active-plug",
    { usRatingDb: 21, snrDb: 26, hml: [27, 22, 19], slc80Db: null },
    [22, 22, 23, 25, 28, 31, 34, 38],
    [5, 4.8, 4.6, 4.5, 4.2, 4, 4.6, 5],
    {
      sizes: ["S", "M", "L"],
      worksWith: { helmet: true, glasses: true, respirator: true },
      tipsEveryDays: 60,
    },
    wrenPart,
  ),
  // Bought for visitors; its box gives one American number and nothing else.
  protector(
    "Teal visitor plug",
    "foam-plug",
    { usRatingDb: 27, snrDb: null, hml: null, slc80Db: null },
    null,
    null,
  ),
];

/** Marsh cap on four sets whose cushions had gone hard: measured on the wearers, about twelve decibels less. */
export const WORN_MARSH_CAP: DemoProtector["data"] = {
  usRatingDb: 11,
  snrDb: 14,
  hDb: 17,
  mDb: 12,
  lDb: 5,
  slc80Db: null,
  bands: { meanDb: [4, 3, 6, 13, 18, 20, 22, 21], sdDb: [3.6, 3.0, 3.0, 3.2, 3.4, 3.6, 3.8, 4.2] },
  active: null,
};
