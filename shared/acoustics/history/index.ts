export { countedSamples } from "./counting";
export {
  type DistributionClass,
  distribution,
  type Envelope,
  envelope,
  percentiles,
} from "./distribution";
export { evaluateHistory } from "./evaluate";
export { type RunningDose, type RunningDoses, runningDose } from "./running-dose";
export * from "./types";
