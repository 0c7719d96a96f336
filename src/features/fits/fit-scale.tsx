import { useLingui } from "@lingui/react";
import { useEffect, useRef, useState } from "react";
import { formatLimit } from "../../../shared/format/level";
import { useLocale } from "../../lib/i18n";

/** One scale for every fit, never fitted to what is shown. */
const LOW_DB = 0;
const HIGH_DB = 45;
const INSET = 5;

/** Where an attenuation stands on a scale of this width; beyond an end at that end. */
export const fitX = (db: number, widthPx: number): number =>
  INSET +
  ((Math.min(HIGH_DB, Math.max(LOW_DB, db)) - LOW_DB) / (HIGH_DB - LOW_DB)) * (widthPx - 2 * INSET);

/**
 * Fits on one line: a tick each, the need or the label as an upright that reaches over them, a caret under their mean.
 * Its numbers stand in text beside it, which is what is read out.
 */
export function FitScale({
  ticksDb,
  uprightDb,
  meanDb = null,
}: {
  ticksDb: readonly number[];
  uprightDb: number | null;
  meanDb?: number | null;
}) {
  const { ref, widthPx } = useWidth(280);
  const x = (db: number) => fitX(db, widthPx);
  return (
    <div className="fit-scale" ref={ref}>
      <svg height={30} viewBox={`0 0 ${widthPx} 30`} aria-hidden="true">
        <line className="fit-axis" x1={INSET} x2={widthPx - INSET} y1={16} y2={16} />
        {ticksDb.map((db, at) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: two workers can have the same figure
          <line key={`${at} ${db}`} className="fit-tick" x1={x(db)} x2={x(db)} y1={9} y2={23} />
        ))}
        {uprightDb !== null && (
          <path
            className="fit-upright"
            d={`M${x(uprightDb)} 2V28M${x(uprightDb) - 3} 2h6M${x(uprightDb) - 3} 28h6`}
          />
        )}
        {meanDb !== null && <path className="fit-caret" d={`M${x(meanDb)} 24l3.3 4.4h-6.6z`} />}
      </svg>
    </div>
  );
}

/** The scale over a column of such lines. */
export function FitScaleHead() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { ref, widthPx } = useWidth(280);
  const step = widthPx < 200 ? 15 : 5;
  const marks = Array.from({ length: HIGH_DB / step + 1 }, (_, at) => at * step);
  return (
    <div className="fit-scale" ref={ref}>
      <span className="sr-only">{i18n.t("Each fit on a scale from 0 to 45 dB")}</span>
      <svg height={18} viewBox={`0 0 ${widthPx} 18`} aria-hidden="true">
        {marks.map((db) => (
          <g key={db}>
            <line
              className="fit-axis"
              x1={fitX(db, widthPx)}
              x2={fitX(db, widthPx)}
              y1={14}
              y2={18}
            />
            {db % 15 === 0 && (
              <text
                x={fitX(db, widthPx)}
                y={11}
                textAnchor={db === LOW_DB ? "start" : db === HIGH_DB ? "end" : "middle"}
              >
                {formatLimit(db, locale)}
              </text>
            )}
          </g>
        ))}
      </svg>
    </div>
  );
}

function useWidth(startPx: number) {
  const ref = useRef<HTMLDivElement>(null);
  const [widthPx, setWidthPx] = useState(startPx);
  useEffect(() => {
    const element = ref.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidthPx(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  return { ref, widthPx };
}
