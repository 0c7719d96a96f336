import type { RuleSetVersion } from "../acoustics/types";
import { energyCriterion, peakCriterion } from "./criterion";

export const AUSTRALIA: RuleSetVersion = {
  key: "australia",
  version: 1,
  title: /*i18n*/ "Australia",
  jurisdiction: "AU",
  citation: "Model WHS Regulations, reg. 56; AS/NZS 1269",
  effectiveFrom: "2012-01-01",
  effectiveTo: null,
  sourceNote:
    /*i18n*/ "From memory. The adjustment of long shifts in AS/NZS 1269.1 is not applied: whether it has the force of law is not known.",
  criteria: [
    energyCriterion({
      id: "limit",
      kind: "limit",
      label: /*i18n*/ "Exposure standard",
      value: 85,
      comparator: "exceeds",
      duties: [
        /*i18n*/ "Bring the noise down so far as is reasonably practicable",
        /*i18n*/ "Where protectors are needed often, test hearing",
      ],
      citation: "Model WHS Regulations regs. 56 to 58",
    }),
    peakCriterion({
      id: "limit-peak",
      kind: "peak",
      label: /*i18n*/ "Exposure standard, peak",
      value: 140,
      comparator: "exceeds",
      peakWeighting: "C",
      duties: [/*i18n*/ "Bring the noise down so far as is reasonably practicable"],
      citation: "Model WHS Regulations reg. 56",
    }),
  ],
  protection: {
    methods: ["slc80", "octave-band"],
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
    /*i18n*/ "A scale of what protects too much",
    /*i18n*/ "Measurement uncertainty",
  ],
};
