import { bandBelow } from "../../shared/acoustics/protection/adequacy";
import { formatLimit } from "../../shared/format/level";
import type { Locale } from "../../shared/i18n";
import type { Pencil, Picture } from "./blocks";

/** The scale of every strip, dB, as on screen. */
const SCALE = { from: 60, to: 120, step: 10 };
const INSET_PT = 7;
/** Height of the middle of what falls away, at the level outside and at the ear. */
const [FROM_Y, TO_Y] = [11, 18];

/**
 * What a protector takes off a noise while it is worn: from the level outside down to the one at the ear, between the brackets
 * of the target that hangs from the action value. Levels in dB; `wornDb` null: not assessed; `actionDb` null: the rule has no
 * target.
 */
export function stripPicture(
  locale: Locale,
  {
    outsideDb,
    wornDb,
    actionDb,
  }: { outsideDb: number; wornDb: number | null; actionDb: number | null },
): Picture {
  return {
    heightPt: 48,
    draw: (pencil) => {
      const x = placeOn(pencil);
      if (actionDb !== null) brackets(pencil, actionDb);
      if (wornDb !== null) {
        ruled(pencil, x(outsideDb), x(wornDb));
        pencil.line(x(wornDb), 12, x(wornDb), 24, { widthPt: 2.2 });
        const at = x(wornDb);
        pencil.shape(
          [
            [at, 25.5],
            [at + 4, 31],
            [at - 4, 31],
          ],
          "ink",
        );
      }
      pencil.line(x(outsideDb), 6, x(outsideDb), 16, { widthPt: 1.8 });
      pencil.line(x(SCALE.from), 33, x(SCALE.to), 33, { widthPt: 0.6 });
      for (let level = SCALE.from; level <= SCALE.to; level += SCALE.step) {
        pencil.line(x(level), 33, x(level), 35.5, { widthPt: 0.6 });
        pencil.text(formatLimit(level, locale), x(level), 36, "center");
      }
    },
  };
}

/** Off the scale it stands at its end: the words beneath say the level. */
const placeOn = (pencil: Pencil) => (levelDb: number) =>
  INSET_PT +
  ((Math.min(SCALE.to, Math.max(SCALE.from, levelDb)) - SCALE.from) / (SCALE.to - SCALE.from)) *
    (pencil.widthPt - 2 * INSET_PT);

/** What falls away, falling from the level outside to the one at the ear: ruled upright, as a printer without colour has it. */
function ruled(pencil: Pencil, fromX: number, toX: number): void {
  const slope = fromX === toX ? 0 : (TO_Y - FROM_Y) / (toX - fromX);
  for (let x = Math.min(fromX, toX) + 1.5; x < Math.max(fromX, toX); x += 1.5) {
    const y = FROM_Y + (x - fromX) * slope;
    pencil.line(x, y - 2.2, x, y + 2.2, { widthPt: 0.6 });
  }
}

function brackets(pencil: Pencil, actionDb: number): void {
  const x = placeOn(pencil);
  const { lowDb, highDb, goodLowDb, goodHighDb } = bandBelow(actionDb);
  const thin = { widthPt: 0.9 };
  for (const [levelDb, towards] of [
    [lowDb, 3],
    [highDb, -3],
  ] as const) {
    const at = x(levelDb);
    pencil.line(at, 6, at, 24, thin);
    for (const y of [6, 24]) pencil.line(at, y, at + towards, y, thin);
  }
  const [from, to] = [x(goodLowDb), x(goodHighDb)];
  pencil.line(from, 2, to, 2, { widthPt: 1.4 });
  for (const at of [from, to]) pencil.line(at, 2, at, 5, { widthPt: 1.4 });
}
