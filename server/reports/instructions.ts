import type { I18n } from "@lingui/core";
import type { ProtectorKind } from "../../shared/acoustics/types";

/** What is shown to whoever gets a protector of this kind. Common practice, no source. */
export function instructionsFor(i18n: I18n, kind: ProtectorKind): string[] {
  const always = i18n.t("Put on before the noise, taken off after it");
  switch (kind) {
    case "foam-plug":
      return [
        always,
        i18n.t("Rolled thin with clean hands, the ear drawn up and back, held until it fills"),
      ];
    case "premoulded-plug":
    case "active-plug":
      return [always, i18n.t("Put in with clean hands, the ear drawn up and back, until it seals")];
    case "custom-plug":
      return [always, i18n.t("Left one in the left ear, turned until it sits flush")];
    case "banded-plug":
      return [always, i18n.t("Pressed in by hand, not by the band alone")];
    case "level-dependent":
    case "communication-headset":
    case "active-earmuff":
      return [
        always,
        i18n.t("Cups over the ears with no hair, cap or spectacle arm between"),
        i18n.t("Switched off or empty, it still protects as far as its cups or tips do"),
      ];
    case "earmuff":
    case "helmet-earmuff":
      return [always, i18n.t("Cups over the ears with no hair, cap or spectacle arm between")];
  }
}

interface Worn {
  readonly kind: ProtectorKind;
  readonly name: string;
}

/** Of two worn together: each step once, what goes on first before what goes over it. */
export function instructionsForBoth(i18n: I18n, inner: Worn, outer: Worn): string[] {
  const [always = "", ...steps] = instructionsFor(i18n, inner.kind);
  return [
    ...new Set([
      always,
      i18n.t("Both worn at once in the noise: neither alone is enough"),
      ...steps.map((step) => i18n.t("First {protector}: {step}", { protector: inner.name, step })),
      ...instructionsFor(i18n, outer.kind)
        .slice(1)
        .map((step) => i18n.t("Then {protector} over it: {step}", { protector: outer.name, step })),
    ]),
  ];
}
