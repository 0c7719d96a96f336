import type {
  ActivePart,
  DayInput,
  MeterSettings,
  OctaveBandValues,
} from "../../shared/acoustics/types";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  lavg5,
  STEADY,
  settings,
} from "./build-day";

/** A day and the rule sets it is judged by: input only, run in Node and in a browser to see that both agree. */
export interface EngineVector {
  readonly name: string;
  readonly day: DayInput;
  readonly governing: string;
  readonly comparison: readonly string[];
}

const LAEQ_SETTINGS: MeterSettings = { ...settings(3, null), criterionLevelDb: 85 };
const RUMBLE: OctaveBandValues = [103.4, 104.1, 101.7, 94.2, 88.9, 83.3, 77.1, 70.6];
const HISS: OctaveBandValues = [null, 61.5, 66.2, 75.8, 92.4, 95.1, 88.3, 80.7];

const CUP_BANDS = {
  meanDb: [13.1, 14.6, 19.8, 27.3, 33.5, 34.9, 36.2, 35.8],
  sdDb: [2.4, 2.2, 1.9, 2.1, 2.6, 2.8, 2.3, 3.1],
} as const;
const REPORTED: ActivePart = {
  attenuationDb: [13.8, 16.2, 14.1, 6.3, -1.4, -2.2, -0.3, 0],
  delayS: null,
  gain: null,
  maximumDb: 20,
  bandwidthHz: 1000,
  saturatesAboveDb: 108,
  batteryMin: 300,
};
const CANCELLER: ActivePart = {
  attenuationDb: null,
  delayS: 120e-6,
  gain: 0.93,
  maximumDb: 22,
  bandwidthHz: 2000,
  saturatesAboveDb: null,
  batteryMin: null,
};
const activeMuff = (active: ActivePart) =>
  buildProtection(
    {},
    {
      inner: buildProtector({ kind: "active-earmuff", bands: CUP_BANDS, snrDb: 27, active }),
      activeCheckPassed: true,
    },
  );
const ALL_RULES = [
  "uk-2005",
  "us-general-industry",
  "us-construction",
  "us-mining",
  "niosh-rel",
  "acgih-tlv",
  "canada-federal",
  "australia",
  "brazil-nr-15",
];

const sampled = (samplesDb: number[], levelDb: number, fields = {}) =>
  buildLevel(levelDb, { samplesDb, instrument: "dosimeter", ...fields });

export const ENGINE_VECTORS: readonly EngineVector[] = [
  {
    name: "four unsteady tasks under every rule set",
    day: dayOf(
      buildTask(
        "grinding",
        137,
        buildLevel(96.3, { lasMaxDb: 109.4, peak: { levelDb: 128.2, weighting: "C" } }),
      ),
      buildTask("fettling", 96, buildLevel(91.7)),
      buildTask("stores", 182, buildLevel(74.9)),
      buildTask("break", 65, buildLevel(62.8)),
    ),
    governing: "eu-2003-10-ec",
    comparison: ALL_RULES,
  },
  {
    name: "steady levels at thresholds and limits",
    day: dayOf(
      buildTask("at-80", 120, buildLevel(80, { metric: STEADY })),
      buildTask("at-85", 120, buildLevel(85, { metric: STEADY })),
      buildTask("at-90", 180, buildLevel(90, { metric: STEADY })),
      buildTask("at-115", 7, buildLevel(115, { metric: STEADY })),
    ),
    governing: "us-general-industry",
    comparison: ["us-mining", "niosh-rel", "brazil-nr-15"],
  },
  {
    name: "averages of a dosimeter at 5 dB",
    day: dayOf(
      buildTask("press", 300, buildLevel(91.2, { metric: lavg5(80) })),
      buildTask("lathe", 180, buildLevel(86.4, { metric: lavg5(90) })),
    ),
    governing: "us-general-industry",
    comparison: ["eu-2003-10-ec", "niosh-rel"],
  },
  {
    name: "sampled tasks with their uncertainty, single numbers worn in part",
    day: buildDay(
      [
        buildShift(480, [
          buildTask("rigging", 50, sampled([83.6, 84.5, 84.4], 84.2)),
          buildTask("run-up", 130, sampled([101.9, 102.8, 103.1], 102.6, { lcMinusLaDb: 8.7 }), {
            protection: buildProtection({ hDb: 30, mDb: 24, lDb: 16, snrDb: 26 }),
            wornPct: 93,
            durationUncertaintyMin: 10,
          }),
          buildTask("teardown", 300, sampled([91.1, 93, 91.8], 92, { lcMinusLaDb: -0.3 }), {
            protection: buildProtection({ hDb: 30, mDb: 24, lDb: 16, snrDb: 26 }),
            wornPct: 100,
          }),
        ]),
      ],
      { usesUncertainty: true },
    ),
    governing: "uk-2005",
    comparison: ["eu-2003-10-ec"],
  },
  {
    name: "two shifts, one governed by a reading, past midnight",
    day: buildDay([
      buildShift(480, [buildTask("early", 480, buildLevel(83.3))], {
        id: "early",
        readings: [buildReading(LAEQ_SETTINGS, { averageDb: 85.7, durationMin: 471 })],
      }),
      buildShift(360, [buildTask("late", 330, buildLevel(88.1))], {
        id: "late",
        unaccounted: { how: "quiet", levelDb: 61.5 },
      }),
    ]),
    governing: "eu-2003-10-ec",
    comparison: ["canada-federal", "australia"],
  },
  {
    name: "a projected dose under Appendix B",
    day: buildDay([
      buildShift(
        720,
        [
          buildTask("test-cell", 400, buildLevel(99.4, { metric: STEADY }), {
            protection: buildProtection({ kind: "foam-plug", usRatingDb: 29 }, { ownFitDb: 17.5 }),
            wornPct: 88,
          }),
          buildTask("office", 320, buildLevel(66, { metric: STEADY })),
        ],
        {
          readings: [
            buildReading(settings(5, 80), {
              dosePct: 143.7,
              durationMin: 431,
              covers: "projected",
            }),
            buildReading(settings(5, 90), { dosePct: 139.2, durationMin: 431, covers: "part" }),
          ],
        },
      ),
    ]),
    governing: "us-general-industry",
    comparison: ["niosh-rel"],
  },
  {
    name: "an active muff from its report, credited, battery shorter than the shift",
    day: buildDay(
      [
        buildShift(480, [
          buildTask("run-up", 300, buildLevel(100.2, { octaveBandsDb: RUMBLE }), {
            protection: activeMuff(REPORTED),
            wornPct: 96,
          }),
          buildTask("jets", 180, buildLevel(98.6, { octaveBandsDb: HISS }), {
            protection: activeMuff(REPORTED),
            wornPct: 100,
          }),
        ]),
      ],
      { creditsActivePart: true },
    ),
    governing: "eu-2003-10-ec",
    comparison: ["uk-2005"],
  },
  {
    name: "an active muff from delay and gain, battery not stated",
    day: dayOf(
      buildTask("run-up", 480, buildLevel(101.3, { octaveBandsDb: RUMBLE }), {
        protection: activeMuff(CANCELLER),
        wornPct: 100,
      }),
    ),
    governing: "uk-2005",
    comparison: ["eu-2003-10-ec"],
  },
  {
    name: "double protection with ratings and with test data",
    day: dayOf(
      buildTask("fan-room", 240, buildLevel(112.8, { octaveBandsDb: RUMBLE, metric: STEADY }), {
        zone: "double",
        wornPct: 100,
        protection: buildProtection(
          { kind: "foam-plug", usRatingDb: 31 },
          {
            outer: buildProtector({ modelId: "outer", usRatingDb: 24 }),
            combinationBands: {
              meanDb: [28, 30, 33, 38, 40, 39, 44, 45],
              sdDb: [4, 4, 3, 3, 3, 3, 3, 4],
            },
          },
        ),
      }),
      buildTask("walk", 240, buildLevel(78.3, { metric: STEADY })),
    ),
    governing: "us-mining",
    comparison: ["us-general-industry", "eu-2003-10-ec", "niosh-rel"],
  },
  {
    name: "unknown time, a missing level and unknown wearing",
    day: buildDay([
      buildShift(600, [
        buildTask("loud", 200, buildLevel(104.2, { lcMinusLaDb: 1.1 }), {
          protection: buildProtection({ snrDb: 31 }),
        }),
        buildTask("unmeasured", 100, null),
      ]),
    ]),
    governing: "eu-2003-10-ec",
    comparison: ["us-general-industry"],
  },
  {
    name: "time like the rest, a stricter worker who must wear one",
    day: buildDay(
      [
        buildShift(
          510,
          [
            buildTask("planer", 212, buildLevel(93.7, { metric: STEADY }), {
              protection: buildProtection({ kind: "banded-plug", usRatingDb: 21 }),
              wornPct: 75,
            }),
            buildTask("bench", 148, buildLevel(79.2, { metric: STEADY }), {
              protection: buildProtection({ kind: "banded-plug", usRatingDb: 21 }),
              wornPct: 60,
              wornIsShiftWide: true,
            }),
          ],
          { unaccounted: { how: "like-the-rest" } },
        ),
      ],
      {},
      { personalTargetDb: 85, mustWear: true },
    ),
    governing: "us-general-industry",
    comparison: ["niosh-rel", "eu-2003-10-ec"],
  },
  {
    name: "hammer blows, peaks under several weightings, a rating off the C-weighted level",
    day: dayOf(
      buildTask(
        "plates",
        330,
        buildLevel(94.6, {
          lcMinusLaDb: 2.4,
          lasMaxDb: 117.3,
          peak: { levelDb: 141.6, weighting: "C" },
        }),
        { protection: buildProtection({ slc80Db: 26, usRatingDb: 25 }), wornPct: 98 },
      ),
      buildTask("marking", 150, buildLevel(81.1, { peak: { levelDb: 129.9, weighting: "Z" } })),
    ),
    governing: "australia",
    comparison: ["brazil-nr-15", "uk-2005", "us-general-industry", "acgih-tlv"],
  },
  {
    name: "a radio under an active muff, worn in part, the battery shorter than the shift",
    day: buildDay(
      [
        buildShift(480, [
          buildTask("run-up", 300, buildLevel(100.2, { octaveBandsDb: RUMBLE }), {
            protection: { ...activeMuff(REPORTED), audioDb: 81.4 },
            wornPct: 96,
          }),
          buildTask("jets", 180, buildLevel(98.6, { octaveBandsDb: HISS }), {
            protection: { ...activeMuff(REPORTED), audioDb: 77.5 },
            wornPct: 100,
          }),
        ]),
      ],
      { creditsActivePart: true },
    ),
    governing: "eu-2003-10-ec",
    comparison: ["uk-2005", "us-general-industry"],
  },
  {
    name: "a radio under Appendix B: steady, averaged at 5 dB and by energy",
    day: dayOf(
      buildTask("mill", 200, buildLevel(97.3, { metric: STEADY }), {
        protection: buildProtection({ usRatingDb: 25 }, { audioDb: 82 }),
        wornPct: 90,
      }),
      buildTask("saw", 160, buildLevel(95.1, { metric: lavg5(80) }), {
        protection: buildProtection({ usRatingDb: 25 }, { audioDb: 79.3 }),
        wornPct: 100,
      }),
      buildTask("yard", 120, buildLevel(92.6), {
        protection: buildProtection({ usRatingDb: 25 }, { audioDb: 84.8 }),
        wornPct: 75,
      }),
    ),
    governing: "us-general-industry",
    comparison: ["niosh-rel", "uk-2005"],
  },
  {
    name: "a radio where a reading says how much noise there was",
    day: buildDay([
      buildShift(
        480,
        [
          buildTask("test-cell", 250, buildLevel(99.4, { metric: STEADY, lcMinusLaDb: 1.2 }), {
            protection: buildProtection({ usRatingDb: 29, snrDb: 33 }, { audioDb: 80 }),
            wornPct: 88,
          }),
          buildTask("office", 200, buildLevel(66, { metric: STEADY })),
        ],
        {
          unaccounted: { how: "like-the-rest" },
          readings: [
            buildReading(settings(5, 80), { dosePct: 143.7, durationMin: 480 }),
            buildReading(LAEQ_SETTINGS, { id: "energy", averageDb: 98.1, durationMin: 480 }),
          ],
        },
      ),
    ]),
    governing: "us-general-industry",
    comparison: ["uk-2005"],
  },
  {
    name: "impulses of all three types under protectors",
    day: dayOf(
      ...([1, 2, 3] as const).map((impulseType) =>
        buildTask(
          `type-${impulseType}`,
          160,
          buildLevel(93 + impulseType, {
            impulseType,
            lcMinusLaDb: 1.4,
            peak: { levelDb: 145.5 + impulseType, weighting: "C" },
          }),
          {
            protection: buildProtection({ hDb: 31, mDb: 25, lDb: 17, snrDb: 28 }),
            wornPct: 100,
          },
        ),
      ),
    ),
    governing: "uk-2005",
    comparison: ["eu-2003-10-ec", "brazil-nr-15"],
  },
  {
    name: "two together past what bone conduction lets be taken off",
    day: dayOf(
      buildTask("fan-room", 480, buildLevel(112.8, { octaveBandsDb: RUMBLE }), {
        zone: "double",
        wornPct: 100,
        protection: buildProtection(
          { kind: "foam-plug" },
          {
            outer: buildProtector({ modelId: "outer" }),
            combinationBands: {
              meanDb: [36, 40, 44, 52, 55, 48, 54, 56],
              sdDb: [4, 4, 3, 3, 3, 3, 3, 4],
            },
          },
        ),
      }),
    ),
    governing: "eu-2003-10-ec",
    comparison: ["uk-2005"],
  },
];
