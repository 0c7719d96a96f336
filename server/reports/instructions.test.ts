import { expect, test } from "vitest";
import { createI18n } from "../../shared/i18n";
import { instructionsFor, instructionsForBoth } from "./instructions";

test("of two worn together the steps of both stand, the plug's first, and what holds for each once", async () => {
  const i18n = await createI18n("en");
  const steps = instructionsForBoth(
    i18n,
    { kind: "foam-plug", name: "Alder foam" },
    { kind: "active-earmuff", name: "Tern active" },
  );
  const [always, ofPlug] = instructionsFor(i18n, "foam-plug");
  const [, ...ofCups] = instructionsFor(i18n, "active-earmuff");
  expect(steps).toEqual([
    always,
    "Both worn at once in the noise: neither alone is enough",
    `First Alder foam: ${ofPlug}`,
    ...ofCups.map((step) => `Then Tern active over it: ${step}`),
  ]);
});
