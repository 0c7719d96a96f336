/** From this share on, what shifts really had counts as another duration than the nominal one. No source: 15 %. */
const OFF_SHARE = 0.15;

/** Whether the mean of what was observed lies further from the nominal minutes than that. */
export const isOffNominal = (nominalMin: number, observedMin: number): boolean =>
  Math.abs(observedMin - nominalMin) > OFF_SHARE * nominalMin + 1e-9;
