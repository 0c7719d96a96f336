import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import {
  type KeyboardEvent,
  type ReactNode,
  useEffect,
  useLayoutEffect,
  useMemo,
  useRef,
  useState,
} from "react";
import { formatBoundedDose } from "../../../shared/format/dose";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type {
  Envelope,
  HistoryAnalysis,
  HistoryChannel,
  HistoryView,
} from "../../../shared/schemas/history";
import { Button } from "../../components/button";
import { useLocale } from "../../lib/i18n";
import {
  type Chart,
  createDoseChart,
  createLevelChart,
  type DoseData,
  type DoseScene,
  LEFT_PX,
  type LevelData,
  type LevelScene,
  NARROW_RIGHT_PX,
  RIGHT_PX,
} from "./chart-canvas";
import { doseAxisTopPct, doseLook } from "./dose-axis";
import { clockChanges, clockText, clockTicks } from "./history-clock";
import { historyQueries } from "./history-queries";
import {
  fitSpan,
  isWhole,
  panSpan,
  type Span,
  shortestSpanS,
  withMargin,
  zoomSpan,
} from "./history-span";
import { changeText, clockOf, criterionText, rangeText } from "./history-words";
import { CHANNEL_SYMBOL } from "./import-words";

/** Narrower than this nothing can be read off: the picture then scrolls in its own window, its names standing over it. */
const NARROWEST_PX = 720;
const NARROWEST_WITHOUT_NAMES_PX = 560;
const TICK_PX = 64;
/** Looking about goes on for a while; only where it rests are finer levels asked for. */
const REST_MS = 180;

const CLOSER = 0.5;
const WIDER = 2;
const STEP = 0.25;

/** The channel that percentiles and doses rest on, and the peaks. */
function firstShown(channels: readonly HistoryChannel[]): HistoryChannel[] {
  const heard = channels.find((one) => one === "las") ?? channels.find((one) => one === "laeq");
  const peak = channels.find((one) => one === "lcpeak" || one === "lzpeak");
  const found = [heard ?? channels[0], peak].filter((one) => one !== undefined);
  return [...new Set(found)];
}

/** The axis of levels: whole twenties from 40 up, wider where a level lies beyond. */
function levelAxis(envelope: Envelope | undefined, shown: readonly HistoryChannel[]) {
  let lowDb = 40;
  let highDb = 120;
  for (const channel of shown) {
    const found = envelope?.channels[channel];
    for (const level of found?.low ?? [])
      if (level !== null && level / 100 < lowDb) lowDb = Math.floor(level / 2000) * 20;
    for (const level of found?.high ?? [])
      if (level !== null && level / 100 > highDb) highDb = Math.ceil(level / 2000) * 20;
  }
  return { lowDb, highDb };
}

function useRested<Value>(value: Value): Value {
  const [rested, setRested] = useState(value);
  useEffect(() => {
    const timer = setTimeout(() => setRested(value), REST_MS);
    return () => clearTimeout(timer);
  }, [value]);
  return rested;
}

/** Calls back when the page's colours or fonts are others. */
function useRepaint(repaint: () => void): void {
  const latest = useRef(repaint);
  latest.current = repaint;
  useEffect(() => {
    const paint = () => latest.current();
    const observer = new MutationObserver(paint);
    observer.observe(document.documentElement, {
      attributes: true,
      attributeFilter: ["data-theme"],
    });
    const lists = ["(prefers-color-scheme: dark)", "(forced-colors: active)"].map((query) =>
      matchMedia(query),
    );
    for (const list of lists) list.addEventListener("change", paint);
    void document.fonts?.ready.then(paint);
    return () => {
      observer.disconnect();
      for (const list of lists) list.removeEventListener("change", paint);
    };
  }, []);
}

export interface LaneProps {
  readonly span: Span;
  readonly widthPx: number;
  readonly rightPx: number;
}

/**
 * Levels and the running doses of a shift on one axis of the site's time, and under them what `lanes` draws. Shows at
 * once what is at hand, and finer levels when they have come.
 */
export function HistoryPicture({
  history,
  envelope,
  analysis,
  leftOut,
  lanes,
  summary,
  tableLink,
}: {
  history: HistoryView;
  envelope: Envelope | undefined;
  analysis: HistoryAnalysis | undefined;
  leftOut: readonly Span[];
  lanes: (props: LaneProps) => ReactNode;
  /** What the picture shows, in words. */
  summary: string;
  tableLink: ReactNode;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const clock = useMemo(() => clockOf(history), [history]);
  const { lengthS } = clock;
  const shortestS = shortestSpanS(history.intervalMs, lengthS);
  const [span, setSpan] = useState<Span>({ fromS: 0, toS: lengthS });
  const [shown, setShown] = useState(() => firstShown(history.channels));
  const [widthPx, setWidthPx] = useState(0);
  const [isNarrow, setIsNarrow] = useState(false);
  const [hiddenDoses, setHiddenDoses] = useState<ReadonlySet<string>>(new Set());

  const frame = useRef<HTMLDivElement>(null);
  const levelsAt = useRef<HTMLDivElement>(null);
  const dosesAt = useRef<HTMLDivElement>(null);
  const readout = useRef<HTMLParagraphElement>(null);
  const levelChart = useRef<Chart<LevelScene, LevelData> | null>(null);
  const doseChart = useRef<Chart<DoseScene, DoseData> | null>(null);

  useLayoutEffect(() => {
    const element = frame.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const measure = () => {
      const isTight = element.clientWidth < NARROWEST_PX;
      const leastPx = isTight ? NARROWEST_WITHOUT_NAMES_PX : NARROWEST_PX;
      setIsNarrow(isTight);
      setWidthPx(Math.max(leastPx, Math.floor(element.clientWidth)));
    };
    measure();
    const observer = new ResizeObserver(measure);
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  const rested = useRested(span);
  const asked = useMemo(() => withMargin(rested, lengthS), [rested, lengthS]);
  const isClose = !isWhole(rested, lengthS);
  const fine = useQuery({
    ...historyQueries.envelope(history.id, asked),
    enabled: isClose && envelope !== undefined && envelope.bucketS > history.intervalMs / 1000,
    placeholderData: (before) => before,
  });
  const levels = useMemo(() => {
    const finer = fine.data;
    if (!finer || isWhole(span, lengthS)) return envelope;
    const count = Object.values(finer.channels)[0]?.high.length ?? 0;
    const endS = finer.fromS + count * finer.bucketS;
    const reaches = finer.fromS <= span.fromS + 1e-6 && endS >= span.toS - 1e-6;
    return reaches && envelope && finer.bucketS < envelope.bucketS ? finer : envelope;
  }, [fine.data, envelope, span, lengthS]);

  const axis = useMemo(() => levelAxis(envelope, shown), [envelope, shown]);
  const changes = useMemo(
    () => clockChanges(clock).map((change) => ({ ...change, text: changeText(i18n, change) })),
    [clock, i18n],
  );
  const rightPx = isNarrow ? NARROW_RIGHT_PX : RIGHT_PX;
  const plotPx = Math.max(1, widthPx - LEFT_PX - rightPx);
  const ticks = useMemo(
    () => clockTicks(clock, span, Math.floor(plotPx / TICK_PX)),
    [clock, span, plotPx],
  );
  const scene = { span, ticks, leftOut, changes, rightPx };

  const meanDb = analysis?.counted.laeqDb ?? null;
  const levelScene: LevelScene = {
    ...scene,
    ...axis,
    channels: shown.map((channel) => ({ channel, symbol: CHANNEL_SYMBOL[channel] })),
    mean:
      meanDb === null
        ? null
        : {
            levelDb: meanDb,
            text: i18n.t("LAeq {level}, the whole", { level: formatLevel(meanDb, locale) }),
          },
  };

  const allDoses = analysis?.runningDose;
  // A line keeps its look, whichever others are shown.
  const doses = useMemo(
    () =>
      (allDoses ?? [])
        .map((dose, place) => ({ ...dose, look: doseLook(place), isMain: place === 0 }))
        .filter((dose) => !hiddenDoses.has(doseKey(dose))),
    [allDoses, hiddenDoses],
  );
  const doseData = useMemo<DoseData | null>(() => {
    const [first] = doses;
    if (!first) return null;
    return {
      endsS: [0, ...first.dosePct.map((_, index) => (index + 1) * first.bucketS)],
      dosesPct: doses.map(({ dosePct }) => [0, ...dosePct]),
    };
  }, [doses]);
  const doseScene: DoseScene = {
    ...scene,
    highPct: doseAxisTopPct(Math.max(0, ...doses.map(({ dosePct }) => dosePct.at(-1) ?? 0))),
    limitText: i18n.t("limit 100 %"),
    pctText: (pct) => formatNumber(pct, 0, locale),
    lines: doses.map((dose) => {
      const bucket = Math.floor((span.toS + 1e-6) / dose.bucketS) - 1;
      const sofar = dose.dosePct[Math.min(bucket, dose.dosePct.length - 1)] ?? 0;
      return {
        text: `${formatBoundedDose(sofar, dose.bound, locale)} ${criterionText(i18n, dose, locale)}`,
        isStrong: dose.isMain,
        look: dose.look,
      };
    }),
  };

  function onPoint(atS: number | null, leftPx: number) {
    levelChart.current?.point(leftPx);
    doseChart.current?.point(leftPx);
    const line = readout.current;
    if (!line) return;
    if (atS === null || !levels) {
      line.textContent = restingText;
      return;
    }
    const bucket = Math.floor((atS - levels.fromS) / levels.bucketS);
    const parts = shown.map((channel) => {
      const high = levels.channels[channel]?.high[bucket] ?? null;
      const low = levels.channels[channel]?.low[bucket] ?? null;
      const text = (level: number | null) =>
        formatLevel(level === null ? null : level / 100, locale);
      const figure = high === low ? text(high) : `${text(low)}–${text(high)}`;
      return `${CHANNEL_SYMBOL[channel]} ${figure}`;
    });
    const sofar = doses.slice(0, 1).map((dose) => {
      const at = dose.dosePct[Math.floor(atS / dose.bucketS) - 1] ?? 0;
      return i18n.t("dose so far {dose}", { dose: formatBoundedDose(at, dose.bound, locale) });
    });
    line.textContent = [clockText(clock, atS, true), ...parts, ...sofar].join(" · ");
  }

  const restingText = i18n.t("{from} to {to}, {duration}", {
    from: clockText(clock, span.fromS, span.toS - span.fromS < 600),
    to: clockText(clock, span.toS, span.toS - span.fromS < 600),
    duration: formatDuration((span.toS - span.fromS) / 60, locale),
  });

  const look = (next: Span) => setSpan(fitSpan(next, shortestS, lengthS));
  const showWhole = () => setSpan({ fromS: 0, toS: lengthS });
  const zoom = (factor: number, aroundS?: number) =>
    setSpan((before) =>
      zoomSpan(before, factor, aroundS ?? (before.fromS + before.toS) / 2, shortestS, lengthS),
    );
  const pan = (share: number) => setSpan((before) => panSpan(before, share, lengthS));

  // What the charts call back is of the latest drawing, they themselves are made once for what they show.
  const calls = useRef({ look, showWhole, onPoint });
  calls.current = { look, showWhole, onPoint };
  const scenes = useRef({ levelScene, doseScene });
  scenes.current = { levelScene, doseScene };

  const hasWidth = widthPx > 0;
  const channelsKey = shown.join(" ");
  // biome-ignore lint/correctness/useExhaustiveDependencies: other channels are another chart; the rest is shown by the next effect
  useLayoutEffect(() => {
    const target = levelsAt.current;
    if (!target || !hasWidth) return;
    const chart = createLevelChart(target, widthPx, scenes.current.levelScene, {
      onSpan: (next) => calls.current.look(next),
      onWhole: () => calls.current.showWhole(),
      onPoint: (atS, left) => calls.current.onPoint(atS, left),
    });
    levelChart.current = chart;
    return () => {
      chart.destroy();
      levelChart.current = null;
    };
  }, [hasWidth, channelsKey, rightPx]);

  const linesKey = doses.map(doseKey).join(" ");
  const linesCount = doses.length;
  // biome-ignore lint/correctness/useExhaustiveDependencies: as above
  useLayoutEffect(() => {
    const target = dosesAt.current;
    if (!target || !hasWidth || linesCount === 0) return;
    const chart = createDoseChart(target, widthPx, scenes.current.doseScene, {
      onSpan: (next) => calls.current.look(next),
      onWhole: () => calls.current.showWhole(),
      onPoint: (atS, left) => calls.current.onPoint(atS, left),
    });
    doseChart.current = chart;
    return () => {
      chart.destroy();
      doseChart.current = null;
    };
  }, [hasWidth, linesKey, rightPx]);

  useLayoutEffect(() => {
    if (!hasWidth) return;
    levelChart.current?.resize(widthPx);
    doseChart.current?.resize(widthPx);
  }, [widthPx, hasWidth]);

  useLayoutEffect(() => {
    levelChart.current?.show(levelScene, levels ?? null);
  });
  useLayoutEffect(() => {
    doseChart.current?.show(doseScene, doseData);
  });
  useLayoutEffect(() => {
    if (readout.current) readout.current.textContent = restingText;
  }, [restingText]);

  useRepaint(() => {
    levelChart.current?.repaint();
    doseChart.current?.repaint();
  });

  // A wheel scrolls the page, unless the picture has the focus or the hand says that it means the picture.
  useEffect(() => {
    const element = frame.current;
    if (!element) return;
    const onWheel = (event: WheelEvent) => {
      const isMeant = event.ctrlKey || event.metaKey || element.contains(document.activeElement);
      const over = (event.target as Element).closest?.(".u-over");
      if (!isMeant || !over) return;
      event.preventDefault();
      const { left, width } = over.getBoundingClientRect();
      const share = (event.clientX - left) / width;
      if (Math.abs(event.deltaX) > Math.abs(event.deltaY)) {
        setSpan((before) => panSpan(before, event.deltaX / width, lengthS));
        return;
      }
      setSpan((before) =>
        zoomSpan(
          before,
          2 ** (event.deltaY / 240),
          before.fromS + share * (before.toS - before.fromS),
          shortestS,
          lengthS,
        ),
      );
    };
    element.addEventListener("wheel", onWheel, { passive: false });
    return () => element.removeEventListener("wheel", onWheel);
  }, [lengthS, shortestS]);

  function onKeyDown(event: KeyboardEvent) {
    if (event.altKey || event.ctrlKey || event.metaKey) return;
    // Where all is seen the arrows scroll the picture's own window.
    if (event.key.startsWith("Arrow") && isWhole(span, lengthS)) return;
    switch (event.key) {
      case "+":
      case "=":
        zoom(CLOSER);
        break;
      case "-":
        zoom(WIDER);
        break;
      case "ArrowLeft":
        pan(-STEP);
        break;
      case "ArrowRight":
        pan(STEP);
        break;
      case "Home":
        showWhole();
        break;
      default:
        return;
    }
    event.preventDefault();
  }

  const isAll = isWhole(span, lengthS);
  return (
    <div className="shift-picture">
      <div className="shift-tools no-print">
        {history.channels.length > 1 && (
          // biome-ignore lint/a11y/useSemanticElements: a fieldset would bring a frame of its own
          <div className="shift-channels" role="group" aria-label={i18n.t("Levels shown")}>
            {history.channels.map((channel) => (
              <label key={channel} className="choice">
                <input
                  type="checkbox"
                  checked={shown.includes(channel)}
                  // The last one stays: an empty chart shows nothing and says nothing.
                  disabled={shown.length === 1 && shown.includes(channel)}
                  onChange={(event) =>
                    setShown(
                      history.channels.filter((one) =>
                        one === channel ? event.target.checked : shown.includes(one),
                      ),
                    )
                  }
                />
                <span>{CHANNEL_SYMBOL[channel]}</span>
              </label>
            ))}
          </div>
        )}
        {/* biome-ignore lint/a11y/useSemanticElements: as above */}
        <div
          className="shift-zoom"
          role="group"
          aria-label={i18n.t("Part of the shift that is seen")}
        >
          <Button onClick={() => zoom(CLOSER)}>{i18n.t("Closer")}</Button>
          <Button disabled={isAll} onClick={() => zoom(WIDER)}>
            {i18n.t("Wider")}
          </Button>
          <Button disabled={isAll || span.fromS <= 0} onClick={() => pan(-STEP)}>
            {i18n.t("Earlier")}
          </Button>
          <Button disabled={isAll || span.toS >= lengthS} onClick={() => pan(STEP)}>
            {i18n.t("Later")}
          </Button>
          <Button disabled={isAll} onClick={showWhole}>
            {i18n.t("Whole")}
          </Button>
        </div>
      </div>
      {(allDoses?.length ?? 0) > 1 && (
        // biome-ignore lint/a11y/useSemanticElements: as above
        <div
          className="shift-channels shift-dose-choice no-print"
          role="group"
          aria-label={i18n.t("Doses shown")}
        >
          {allDoses?.map((dose) => {
            const key = doseKey(dose);
            const isShown = !hiddenDoses.has(key);
            return (
              <label key={key} className="choice">
                <input
                  type="checkbox"
                  checked={isShown}
                  disabled={isShown && doses.length === 1}
                  onChange={() =>
                    setHiddenDoses((before) => {
                      const next = new Set(before);
                      if (!next.delete(key)) next.add(key);
                      return next;
                    })
                  }
                />
                <span>{criterionText(i18n, dose, locale)}</span>
              </label>
            );
          })}
        </div>
      )}
      {isNarrow && (
        <div className="shift-legend no-print" aria-hidden="true">
          <ul>
            {levelScene.mean && (
              <li>
                <LineSample dash={[3, 2]} />
                <b>{levelScene.mean.text}</b>
              </li>
            )}
            {doseScene.lines.map(({ text, isStrong, look }) => (
              <li key={text}>
                <LineSample dash={look.dash} colour={look.colour} />
                {isStrong ? <b>{text}</b> : text}
              </li>
            ))}
          </ul>
          <p className="shift-hint">{i18n.t("Swipe the picture sideways for the rest of it.")}</p>
        </div>
      )}
      {/* biome-ignore lint/a11y/useSemanticElements: a section would be one more landmark */}
      <div
        className="shift-scroll"
        ref={frame}
        role="group"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: keys look closer, and scroll where it is wider than the window
        tabIndex={0}
        aria-label={i18n.t(
          "Picture of the shift. Plus and minus look closer and wider, arrows move, Home shows the whole.",
        )}
        onKeyDown={onKeyDown}
      >
        <div
          className="shift-paper"
          style={{ minWidth: isNarrow ? NARROWEST_WITHOUT_NAMES_PX : NARROWEST_PX }}
        >
          <div role="img" aria-label={summary}>
            <p className="shift-caption" aria-hidden="true">
              {i18n.t("Level")} <span className="unit">dB</span>
            </p>
            <div className="shift-levels" ref={levelsAt} />
            {linesCount > 0 && (
              <>
                <p className="shift-caption" aria-hidden="true">
                  {i18n.t("Dose so far")} <span className="unit">%</span>
                </p>
                <div className="shift-doses" ref={dosesAt} />
              </>
            )}
          </div>
          {hasWidth && lanes({ span, widthPx, rightPx })}
        </div>
      </div>
      <div className="shift-foot">
        <p className="shift-readout mono" ref={readout} />
        <p>
          <span className="shift-hint no-print">
            {i18n.t("Drag to look closer, double click for the whole.")}
          </span>{" "}
          {tableLink}
        </p>
        {fine.error && isClose && (
          <p className="field-note" role="status">
            {i18n.t("Finer levels could not be read; these are the coarse ones.")}
          </p>
        )}
      </div>
      <p className="sr-only" aria-live="polite">
        {isAll ? "" : i18n.t("Seen: {range}", { range: rangeText(clock, span) })}
      </p>
    </div>
  );
}

/** What tells one running dose from the others. */
const doseKey = ({
  label,
  settings,
}: Pick<HistoryAnalysis["runningDose"][number], "label" | "settings">) =>
  `${label} ${settings.criterionLevelDb} ${settings.exchangeRateDb} ${settings.thresholdDb}`;

function LineSample({ dash, colour = "ink" }: { dash: readonly number[]; colour?: string }) {
  return (
    <svg width="24" height="8" viewBox="0 0 24 8" aria-hidden="true">
      <line
        x2="24"
        y1="4"
        y2="4"
        stroke={`var(--${colour})`}
        strokeWidth="2"
        strokeDasharray={dash.join(" ")}
      />
    </svg>
  );
}
