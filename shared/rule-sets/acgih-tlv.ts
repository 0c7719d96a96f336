import type { RuleSetVersion } from "../acoustics/types";
import { doseCriterion, peakCriterion } from "./criterion";

export const ACGIH_TLV: RuleSetVersion = {
  key: "acgih-tlv",
  version: 1,
  title: /*i18n*/ "ACGIH threshold limit value",
  jurisdiction: "US",
  citation: "ACGIH TLV, Audible sound",
  effectiveFrom: "1994-01-01",
  effectiveTo: null,
  sourceNote:
    /*i18n*/ "From memory. A recommendation, not a regulation. Its note on pregnancy names 115 dBC over eight hours and a peak of 155 dBC.",
  criteria: [
    doseCriterion({
      id: "limit",
      kind: "limit",
      label: /*i18n*/ "Threshold limit value",
      value: 100,
      levelDb: 85,
      comparator: "exceeds",
      exchangeRateDb: 3,
      thresholdDb: 80,
      criterionLevelDb: 85,
      twaFactor: null,
      duties: [
        /*i18n*/ "Bring the exposure below the value, and run a hearing conservation programme",
      ],
      citation: "ACGIH TLV, Audible sound, Table 1",
    }),
    peakCriterion({
      id: "limit-peak",
      kind: "peak",
      label: /*i18n*/ "Threshold limit value, peak",
      value: 140,
      comparator: "exceeds",
      peakWeighting: "C",
      duties: [/*i18n*/ "Let no unprotected ear meet this peak"],
      citation: "ACGIH TLV, Audible sound",
    }),
  ],
  protection: {
    methods: [],
    alpha: 1,
    derating: "none",
    allowanceDb: 0,
    ownFit: "replaces",
    double: "test-data-only",
    adequacy: "not-stated",
    targetDb: null,
    strictTargetDb: null,
  },
  notStated: [
    /*i18n*/ "An action value",
    /*i18n*/ "How the level at the ear is estimated, and when a protector is enough",
    /*i18n*/ "Measurement uncertainty",
  ],
};
