import { useLingui } from "@lingui/react";
import type { ActiveChartBand } from "../../../shared/acoustics/protection/active-chart";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatLevel } from "../../../shared/format/level";
import { bandLabel } from "../../components/band-picture";
import { useLocale } from "../../lib/i18n";
import { useWidth } from "./use-width";

const LEFT = 30;
const RIGHT = 4;
/** Room for two lines of figures over the scale, where no bar reaches. */
const TOP = 34;
const LINE = 14;
const BOTTOM = 24;
const HEIGHT = 278;
const LOW_DB = 20;
const HIGH_DB = 110;

/**
 * A noise by octave band, A-weighted: outside (tick above), under cup or plug (the bar's foot), and with the active part
 * (ring). The bar falls from the one to the other as a strip's does; a ring above its foot is noise that was added, and
 * an upright says so, with its figure over the scale: beside it the next band's bar is too near on a phone. On one scale, widened by whole tens where a level lies beyond it.
 */
const placeOf = (hz: number) => OCTAVE_BANDS_HZ.indexOf(hz as (typeof OCTAVE_BANDS_HZ)[number]);

export function BandLevels({ bands, title }: { bands: readonly ActiveChartBand[]; title: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { ref, widthPx } = useWidth(460);
  const all = bands.flatMap(({ outsideADb, passiveADb, activeADb }) => [
    outsideADb,
    passiveADb,
    activeADb,
  ]);
  const lowDb = Math.min(LOW_DB, ...all.map((db) => Math.floor(db / 10) * 10));
  const highDb = Math.max(HIGH_DB, ...all.map((db) => Math.ceil(db / 10) * 10));
  const perDb = (HEIGHT - TOP - BOTTOM) / (highDb - lowDb);
  const y = (db: number) => TOP + (highDb - db) * perDb;
  const step = (widthPx - LEFT - RIGHT) / OCTAVE_BANDS_HZ.length;
  const xOf = (hz: number) => LEFT + (placeOf(hz) + 0.5) * step;
  const half = Math.min(11, step * 0.3);
  const guides = Array.from(
    { length: Math.round((highDb - lowDb) / 10) + 1 },
    (_, index) => lowDb + index * 10,
  );
  return (
    <div className="band-picture" ref={ref}>
      <svg width={widthPx} height={HEIGHT} role="img" aria-label={title}>
        {guides.map((db) => (
          <g key={db}>
            <line
              className="band-guide"
              x1={LEFT}
              x2={widthPx - RIGHT}
              y1={Math.round(y(db)) + 0.5}
              y2={Math.round(y(db)) + 0.5}
            />
            {db % 20 === 0 && (
              <text x={LEFT - 6} y={y(db) + 4} textAnchor="end">
                {db < 0 ? `−${-db}` : db}
              </text>
            )}
          </g>
        ))}
        {OCTAVE_BANDS_HZ.map((hz) => (
          <text key={hz} x={xOf(hz)} y={HEIGHT - 6} textAnchor="middle">
            {bandLabel(hz)}
          </text>
        ))}
        <polyline
          className="at-ear-active-line"
          points={bands.map((band) => `${xOf(band.frequencyHz)},${y(band.activeADb)}`).join(" ")}
        />
        {bands.map(({ frequencyHz, outsideADb, passiveADb, activeADb, addsNoise, gainDb }) => {
          const x = xOf(frequencyHz);
          return (
            <g key={frequencyHz}>
              <rect
                className="at-ear-bar"
                x={x - half / 2}
                width={half}
                y={y(outsideADb)}
                height={Math.max(0, y(passiveADb) - y(outsideADb))}
              />
              <path className="at-ear-outside" d={`M${x - half} ${y(outsideADb)}h${2 * half}`} />
              <path className="band-tick" d={`M${x - half} ${y(passiveADb)}h${2 * half}`} />
              <circle className="band-ring" cx={x} cy={y(activeADb)} r="3.2" />
              {addsNoise && (
                <>
                  <path
                    className="at-ear-added"
                    d={`M${x + half + 3} ${y(passiveADb)}V${y(activeADb)}m-3 0h6m-6 ${y(passiveADb) - y(activeADb)}h6`}
                  />
                  <text
                    className="at-ear-added-figure"
                    textAnchor="middle"
                    x={Math.min(x, widthPx - 22)}
                    y={placeOf(frequencyHz) % 2 === 0 ? LINE : 2 * LINE}
                  >
                    {`+${formatLevel(-gainDb, locale)}`}
                  </text>
                </>
              )}
            </g>
          );
        })}
      </svg>
      <p className="picture-legend">
        {i18n.t(
          "Thin tick: outside. Thick tick: under cup or plug. Ring: with the active part on; upright, and the figure at the top of its band: what it adds there. A-weighted, dB; Hz beneath.",
        )}
      </p>
    </div>
  );
}
