import type { RuleSetVersion } from "../acoustics/types";
import { energyCriterion } from "./criterion";

export const CANADA_FEDERAL: RuleSetVersion = {
  key: "canada-federal",
  version: 1,
  title: /*i18n*/ "Canada, federal",
  jurisdiction: "CA",
  citation: "SOR/86-304, Part VII",
  effectiveFrom: "1991-08-15",
  effectiveTo: null,
  sourceNote:
    /*i18n*/ "Read; the date is from memory. Any 24 hours are judged as the day of shifts that start on one date. The schedule's time at a level is the same law as the level over eight hours, printed in round figures.",
  criteria: [
    energyCriterion({
      id: "investigation",
      kind: "action",
      label: /*i18n*/ "Investigation level",
      value: 84,
      comparator: "reaches",
      duties: [/*i18n*/ "Have a qualified person investigate the exposure and report in writing"],
      citation: "SOR/86-304 s. 7.3",
      sourceStatus: "read",
    }),
    energyCriterion({
      id: "information",
      kind: "action",
      label: /*i18n*/ "Report and information",
      value: 84,
      comparator: "reaches",
      duties: [/*i18n*/ "Report, and give each worker exposed written information on the hazard"],
      citation: "SOR/86-304 ss. 7.5, 7.6",
      sourceStatus: "read",
    }),
    energyCriterion({
      id: "limit",
      kind: "limit",
      label: /*i18n*/ "Exposure limit",
      value: 87,
      comparator: "exceeds",
      duties: [
        /*i18n*/ "Bring the noise down",
        /*i18n*/ "Where that is not practicable, report the reasons and provide protectors",
      ],
      citation: "SOR/86-304 ss. 7.4, 7.7",
      sourceStatus: "read",
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
    /*i18n*/ "A threshold: all levels are counted",
    /*i18n*/ "The duration at 84 dBA, read on slow, that opens an investigation: judged as a level over eight hours",
    /*i18n*/ "A ceiling and a peak",
    /*i18n*/ "How the level at the ear is estimated, and when a protector is enough",
    /*i18n*/ "Measurement uncertainty",
  ],
};
