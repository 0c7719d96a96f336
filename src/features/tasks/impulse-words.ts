import type { I18n } from "@lingui/core";
import type { ImpulseType } from "../../../shared/acoustics/protection/impulse";

export const IMPULSE_TYPES: readonly ImpulseType[] = [1, 2, 3];

/** EN 458's types of impulse noise, by where its energy lies. */
export function impulseTypeWord(i18n: I18n, type: ImpulseType): string {
  switch (type) {
    case 1:
      return i18n.t("Type 1: mostly low frequencies, as of a press");
    case 2:
      return i18n.t("Type 2: middle and high ones, as of a hammer on plate");
    case 3:
      return i18n.t("Type 3: mostly high frequencies");
  }
}
