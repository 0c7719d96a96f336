import { evaluateDay, METHOD_VERSION } from "./day";
import { buildWorking } from "./working";

export { METHOD_VERSION };

/** One arithmetic by its number. */
export interface Method {
  readonly evaluateDay: typeof evaluateDay;
  readonly buildWorking: typeof buildWorking;
}

/**
 * Every method version, so that an old result can be run again. A superseded one moves into `past/` and keeps its
 * number here.
 */
export const METHODS: Readonly<Record<number, Method>> = {
  [METHOD_VERSION]: { evaluateDay, buildWorking },
};
