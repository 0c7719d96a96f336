import uPlot from "uplot";
import type { Envelope, HistoryChannel } from "../../../shared/schemas/history";
import { type DoseLook, dosePlace, doseTicks } from "./dose-axis";
import type { ClockChange, ClockTick } from "./history-clock";
import type { Span } from "./history-span";

/** Room beside the plot, the same in both charts and in the lanes beneath: levels at the left, names at the right. */
export const LEFT_PX = 60;
export const RIGHT_PX = 236;
/** On a phone the names stand over the picture. */
export const NARROW_RIGHT_PX = 14;
const LEVELS_PX = 300;
const DOSES_PX = 168;
const LABEL_STEP_PX = 16;
const MARK_PX = 22;

type Colour = "paper" | "ink" | "ink-2" | "ink-3" | "rule" | "hair" | "v7" | "v6" | "v4";
type Colours = Readonly<Record<Colour, string>>;
const NAMES: readonly Colour[] = [
  "paper",
  "ink",
  "ink-2",
  "ink-3",
  "rule",
  "hair",
  "v7",
  "v6",
  "v4",
];

function readColours(element: HTMLElement): Colours {
  const style = getComputedStyle(element);
  return Object.fromEntries(
    NAMES.map((name) => [name, style.getPropertyValue(`--${name}`).trim()]),
  ) as Record<Colour, string>;
}

const FONT = '12.5px "Atkinson Hyperlegible Next Variable", system-ui, sans-serif';
/** Whole pixels: the chart library scales no others for a fine screen. */
const FIGURES = '13px "Atkinson Hyperlegible Mono Variable", ui-monospace, monospace';

const CHANNEL_COLOUR: Record<HistoryChannel, Colour> = {
  laeq: "v4",
  las: "v6",
  "las-max": "ink",
  "laf-max": "ink-2",
  lceq: "rule",
  lcpeak: "ink-2",
  lzpeak: "ink-3",
};
/** Maxima stand as ticks of their own; a mean or a slow level runs on as a line. */
const isTicks = (channel: HistoryChannel) =>
  channel === "las-max" || channel === "laf-max" || channel === "lcpeak" || channel === "lzpeak";

interface Label {
  /** Of the plot's height, CSS pixels from its top. */
  y: number;
  text: string;
  colour: Colour;
  mark: "line" | "ticks" | "dashes" | null;
  /** Of a line that is told by it. */
  dash?: readonly number[];
  isStrong?: boolean;
}

/** Labels in the order of their marks, none over another. */
function spread(labels: readonly Label[], heightPx: number): Label[] {
  const placed = labels.toSorted((a, b) => a.y - b.y).map((label) => ({ ...label }));
  for (const [index, label] of placed.entries()) {
    const above = placed[index - 1];
    label.y = Math.max(label.y, above ? above.y + LABEL_STEP_PX : 7);
  }
  let lowest = heightPx - 4;
  for (const label of placed.toReversed()) {
    label.y = Math.min(label.y, lowest);
    lowest = label.y - LABEL_STEP_PX;
  }
  return placed;
}

/** What has room of a name; all of it stands in the tables. */
function shortened(ctx: CanvasRenderingContext2D, text: string, roomPx: number): string {
  let kept = text;
  while (kept.length > 4 && ctx.measureText(kept).width > roomPx)
    kept = `${kept.replace(/…$/, "").slice(0, -1).trimEnd()}…`;
  return kept;
}

function drawLabels(chart: uPlot, labels: readonly Label[], colours: Colours): void {
  const { ctx, bbox } = chart;
  const ratio = uPlot.pxRatio;
  // There is no room for them on a phone.
  if (ctx.canvas.width - bbox.left - bbox.width < (RIGHT_PX / 2) * ratio) return;
  ctx.save();
  ctx.textBaseline = "middle";
  ctx.textAlign = "left";
  const x = bbox.left + bbox.width + 8 * ratio;
  for (const { y, text, colour, mark, dash = [], isStrong } of spread(
    labels,
    bbox.height / ratio,
  )) {
    const top = bbox.top + y * ratio;
    ctx.strokeStyle = colours[colour];
    ctx.lineWidth = (mark === "line" ? 2 : 1.4) * ratio;
    ctx.setLineDash((mark === "dashes" ? [3, 2] : dash).map((px) => px * ratio));
    ctx.beginPath();
    if (mark === "line" || mark === "dashes") {
      ctx.moveTo(x, top);
      ctx.lineTo(x + MARK_PX * ratio, top);
    } else if (mark === "ticks") {
      for (const shift of [2, 6, 10]) {
        ctx.moveTo(x + shift * ratio, top - 3 * ratio);
        ctx.lineTo(x + shift * ratio, top + 3 * ratio);
      }
    }
    ctx.stroke();
    ctx.font = `${isStrong ? "600 " : ""}${FONT.replace("12.5", String(12.5 * ratio))}`;
    ctx.fillStyle = colours.ink;
    const from = x + (mark === null ? 0 : (MARK_PX + 6) * ratio);
    ctx.fillText(shortened(ctx, text, ctx.canvas.width - from), from, top);
  }
  ctx.restore();
}

/** The limit as on the strip: ink, with paper on both sides and a serif at each end. */
function drawLimit(chart: uPlot, value: number, colours: Colours): void {
  const { ctx, bbox } = chart;
  const ratio = uPlot.pxRatio;
  const y = Math.round(chart.valToPos(value, "y", true));
  ctx.save();
  ctx.fillStyle = colours.paper;
  ctx.fillRect(bbox.left, y - 2 * ratio, bbox.width, 4 * ratio);
  ctx.fillStyle = colours.ink;
  ctx.fillRect(bbox.left, y - ratio, bbox.width, 2 * ratio);
  for (const x of [bbox.left, bbox.left + bbox.width - 2 * ratio])
    ctx.fillRect(x, y - 3 * ratio, 2 * ratio, 6 * ratio);
  ctx.restore();
}

/** Time that is left out: slanted lines over the plot, as its lane has them. */
function drawLeftOut(chart: uPlot, stretches: readonly Span[], colours: Colours): void {
  const { ctx, bbox } = chart;
  const ratio = uPlot.pxRatio;
  const { min, max } = chart.scales.x ?? {};
  for (const { fromS, toS } of stretches) {
    if (min == null || max == null || toS <= min || fromS >= max) continue;
    const left = chart.valToPos(Math.max(fromS, min), "x", true);
    const right = chart.valToPos(Math.min(toS, max), "x", true);
    ctx.save();
    ctx.beginPath();
    ctx.rect(left, bbox.top, Math.max(right - left, ratio), bbox.height);
    ctx.clip();
    ctx.strokeStyle = colours.rule;
    ctx.lineWidth = ratio;
    ctx.beginPath();
    for (let x = left - bbox.height; x < right; x += 10 * ratio) {
      ctx.moveTo(x, bbox.top + bbox.height);
      ctx.lineTo(x + bbox.height, bbox.top);
    }
    ctx.stroke();
    ctx.restore();
  }
}

function drawChanges(
  chart: uPlot,
  changes: readonly (ClockChange & { text: string })[],
  colours: Colours,
): void {
  const { ctx, bbox } = chart;
  const ratio = uPlot.pxRatio;
  const { min, max } = chart.scales.x ?? {};
  ctx.save();
  ctx.strokeStyle = colours.v7;
  ctx.fillStyle = colours.v7;
  ctx.lineWidth = 1.5 * ratio;
  ctx.textBaseline = "top";
  ctx.font = FONT.replace("12.5", String(12.5 * ratio));
  for (const { atS, text } of changes) {
    if (min == null || max == null || atS < min || atS > max) continue;
    const x = chart.valToPos(atS, "x", true);
    ctx.setLineDash([4 * ratio, 3 * ratio]);
    ctx.beginPath();
    ctx.moveTo(x, bbox.top);
    ctx.lineTo(x, bbox.top + bbox.height);
    ctx.stroke();
    const isRight = x > bbox.left + bbox.width / 2;
    ctx.textAlign = isRight ? "right" : "left";
    ctx.fillText(text, x + (isRight ? -6 : 6) * ratio, bbox.top + 2 * ratio);
  }
  ctx.restore();
}

/**
 * Each bucket from its lowest to its highest, joined to the one before only where the two do not meet: a line that turned
 * at every bucket would cost a joint at each.
 */
function envelopePath(chart: uPlot, series: number, from: number, to: number): Path2D {
  const path = new Path2D();
  const xs = chart.data[0];
  const high = chart.data[series]!;
  const low = chart.data[series + 1]!;
  const [at, y] = scalers(chart);
  let before: { x: number; top: number; bottom: number } | null = null;
  for (let index = from; index <= to; index++) {
    const highDb = high[index];
    const lowDb = low[index];
    if (highDb == null || lowDb == null) {
      before = null;
      continue;
    }
    const bucket = { x: at(xs[index]!), top: y(highDb), bottom: y(lowDb) };
    if (before && bucket.top > before.bottom) {
      path.moveTo(before.x, before.bottom);
      path.lineTo(bucket.x, bucket.top);
    } else if (before && bucket.bottom < before.top) {
      path.moveTo(before.x, before.top);
      path.lineTo(bucket.x, bucket.bottom);
    } else if (before && bucket.top === bucket.bottom && before.top === before.bottom) {
      path.moveTo(before.x, before.top);
      path.lineTo(bucket.x, bucket.top);
    }
    // A value alone between gaps is a dot, which a line of no length would not show.
    path.moveTo(bucket.x, bucket.bottom + 0.5);
    path.lineTo(bucket.x, bucket.top);
    before = bucket;
  }
  return path;
}

function ticksPath(chart: uPlot, series: number, from: number, to: number): Path2D {
  const path = new Path2D();
  const xs = chart.data[0];
  const high = chart.data[series]!;
  const [at, y] = scalers(chart);
  const half = 2 * uPlot.pxRatio;
  for (let index = from; index <= to; index++) {
    const top = high[index];
    if (top == null) continue;
    const x = at(xs[index]!);
    path.moveTo(x, y(top) - half);
    path.lineTo(x, y(top) + half);
  }
  return path;
}

function scalers(chart: uPlot): [(value: number) => number, (value: number) => number] {
  const { bbox, scales } = chart;
  const { min: fromX = 0, max: toX = 1 } = scales.x ?? {};
  const { min: fromY = 0, max: toY = 1 } = scales.y ?? {};
  const perX = bbox.width / ((toX ?? 1) - (fromX ?? 0));
  const perY = bbox.height / ((toY ?? 1) - (fromY ?? 0));
  return [
    (value) => bbox.left + (value - (fromX ?? 0)) * perX,
    (value) => bbox.top + bbox.height - (value - (fromY ?? 0)) * perY,
  ];
}

/** What a chart shows besides its data; read anew at each drawing. */
export interface ChartScene {
  span: Span;
  /** Room at the right, for names. */
  rightPx: number;
  ticks: readonly ClockTick[];
  leftOut: readonly Span[];
  changes: readonly (ClockChange & { text: string })[];
}

export interface LevelScene extends ChartScene {
  lowDb: number;
  highDb: number;
  channels: readonly { channel: HistoryChannel; symbol: string }[];
  mean: { levelDb: number; text: string } | null;
}

export interface DoseScene extends ChartScene {
  highPct: number;
  lines: readonly { text: string; isStrong: boolean; look: DoseLook }[];
  limitText: string;
  pctText: (pct: number) => string;
}

interface Callbacks {
  /** A part was marked by dragging. */
  onSpan: (span: Span) => void;
  onWhole: () => void;
  /** The pointer is at a time; null when it left. */
  onPoint: (atS: number | null, leftPx: number) => void;
}

function xAxis(scene: ChartScene, colours: () => Colours, isLabelled: boolean): uPlot.Axis {
  return {
    scale: "x",
    size: isLabelled ? 30 : 8,
    gap: 3,
    font: FIGURES,
    stroke: () => colours()["ink-2"],
    splits: () => scene.ticks.map(({ atS }) => atS),
    values: (_, splits) =>
      splits.map((atS) => {
        const text = scene.ticks.find((tick) => tick.atS === atS)?.text ?? "";
        // A long one at the very beginning would stand in the lowest level's figure.
        const share = (atS - scene.span.fromS) / (scene.span.toS - scene.span.fromS);
        return isLabelled && (text.length < 6 || share > 0.03) ? text : "";
      }),
    grid: { stroke: () => colours().hair, width: 1 },
    ticks: { stroke: () => colours().ink, width: 1, size: 5 },
    border: { show: true, stroke: () => colours().ink, width: 1 },
  };
}

const yAxis = (
  colours: () => Colours,
  splits: () => number[],
  text: (value: number) => string,
): uPlot.Axis => ({
  scale: "y",
  size: LEFT_PX,
  gap: 4,
  font: FIGURES,
  stroke: () => colours()["ink-2"],
  splits,
  values: (_, values) => values.map(text),
  grid: { stroke: () => colours().hair, width: 1 },
  ticks: { show: false },
});

function cursorOptions(onWhole: () => void): uPlot.Cursor {
  return {
    y: false,
    points: { show: false },
    drag: { x: true, y: false, setScale: false, dist: 4 },
    bind: {
      dblclick: () => () => {
        onWhole();
        return null;
      },
    },
  };
}

/** What the page does with a chart; the drawing itself is all uPlot's. */
export interface Chart<Scene, Data> {
  /** Draws anew: in the next frame, from what is at hand. */
  show(scene: Scene, data: Data | null): void;
  resize(widthPx: number): void;
  /** The theme or the fonts are others than before. */
  repaint(): void;
  point(leftPx: number): void;
  readonly over: HTMLElement;
  destroy(): void;
}

const hooksFor = (
  { onSpan, onPoint }: Callbacks,
  draw: (chart: uPlot) => void,
): uPlot.Hooks.Arrays => ({
  draw: [draw],
  setSelect: [
    (chart) => {
      const { left, width } = chart.select;
      if (width < 4) return;
      onSpan({ fromS: chart.posToVal(left, "x"), toS: chart.posToVal(left + width, "x") });
      chart.setSelect({ left: 0, top: 0, width: 0, height: 0 }, false);
    },
  ],
  setCursor: [
    (chart) => {
      const { left = -1 } = chart.cursor;
      onPoint(left < 0 ? null : chart.posToVal(left, "x"), left);
    },
  ],
});

export type LevelData = Pick<Envelope, "fromS" | "bucketS" | "channels">;

export function createLevelChart(
  target: HTMLElement,
  widthPx: number,
  first: LevelScene,
  callbacks: Callbacks,
): Chart<LevelScene, LevelData> {
  const scene = { ...first };
  let colours = readColours(target);
  const shown = first.channels;
  let drawn: LevelData | null = null;

  function draw(chart: uPlot) {
    drawLeftOut(chart, scene.leftOut, colours);
    drawChanges(chart, scene.changes, colours);
    const labels: Label[] = shown.flatMap(({ channel, symbol }, place): Label[] => {
      const high = chart.data[1 + 2 * place];
      const low = chart.data[2 + 2 * place];
      const last = Math.min(chart.valToIdx(scene.span.toS), (high?.length ?? 0) - 1);
      for (let index = last; index >= 0; index--) {
        const top = high?.[index];
        const bottom = low?.[index];
        if (top == null || bottom == null) continue;
        const levelDb = isTicks(channel) ? top : (top + bottom) / 2;
        const mark = isTicks(channel) ? "ticks" : "line";
        return [
          { y: chart.valToPos(levelDb, "y"), text: symbol, colour: CHANNEL_COLOUR[channel], mark },
        ];
      }
      return [];
    });
    if (scene.mean) {
      const { ctx, bbox } = chart;
      const y = chart.valToPos(scene.mean.levelDb, "y", true);
      ctx.save();
      ctx.strokeStyle = colours.ink;
      ctx.lineWidth = 1.4 * uPlot.pxRatio;
      ctx.setLineDash([6 * uPlot.pxRatio, 4 * uPlot.pxRatio]);
      ctx.beginPath();
      ctx.moveTo(bbox.left, y);
      ctx.lineTo(bbox.left + bbox.width, y);
      ctx.stroke();
      ctx.restore();
      labels.push({
        y: chart.valToPos(scene.mean.levelDb, "y"),
        text: scene.mean.text,
        colour: "ink",
        mark: "dashes",
        isStrong: true,
      });
    }
    drawLabels(chart, labels, colours);
  }

  const chart = new uPlot(
    {
      width: widthPx,
      height: LEVELS_PX,
      padding: [8, first.rightPx, 0, 0],
      legend: { show: false },
      cursor: cursorOptions(callbacks.onWhole),
      scales: {
        x: { time: false, auto: false },
        y: { auto: false, range: () => [scene.lowDb, scene.highDb] },
      },
      axes: [
        xAxis(scene, () => colours, true),
        yAxis(
          () => colours,
          () => {
            const decibels: number[] = [];
            for (let db = scene.lowDb; db <= scene.highDb; db += 20) decibels.push(db);
            return decibels;
          },
          String,
        ),
      ],
      series: [
        {},
        ...shown.flatMap(({ channel }): uPlot.Series[] => [
          {
            scale: "y",
            stroke: () => colours[CHANNEL_COLOUR[channel]],
            width: 1.2,
            points: { show: false },
            paths: (self, index, from, to) => {
              const last = self.data[0].length - 1;
              const [begin, end] = [Math.max(0, from - 1), Math.min(last, to + 1)];
              const path = isTicks(channel) ? ticksPath : envelopePath;
              return { stroke: path(self, index, begin, end) };
            },
          },
          { scale: "y", points: { show: false }, paths: () => null },
        ]),
      ],
      hooks: hooksFor(callbacks, draw),
    },
    undefined,
    target,
  );

  return {
    over: chart.over,
    show(next, data) {
      Object.assign(scene, next);
      if (data && data !== drawn) chart.setData(levelColumns(data, shown), false);
      drawn = data;
      chart.setScale("y", { min: scene.lowDb, max: scene.highDb });
      // Draws as well, once for all of these, even where the span is the same.
      chart.setScale("x", { min: scene.span.fromS, max: scene.span.toS });
    },
    resize: (width) => chart.setSize({ width, height: LEVELS_PX }),
    repaint() {
      colours = readColours(target);
      chart.redraw();
    },
    point: (left) => chart.setCursor({ left, top: left < 0 ? -1 : 0 }, false),
    destroy: () => chart.destroy(),
  };
}

/** Middle of each bucket, then highest and lowest of each channel in decibels. */
function levelColumns(
  { fromS, bucketS, channels }: LevelData,
  shown: readonly { channel: HistoryChannel }[],
): uPlot.AlignedData {
  const count = Object.values(channels)[0]?.high.length ?? 0;
  const xs = Array.from({ length: count }, (_, index) => fromS + (index + 0.5) * bucketS);
  const inDb = (levels: readonly (number | null)[] | undefined) =>
    (levels ?? []).map((level) => (level === null ? null : level / 100));
  return [
    xs,
    ...shown.flatMap(({ channel }) => [
      inDb(channels[channel]?.high),
      inDb(channels[channel]?.low),
    ]),
  ];
}

export interface DoseData {
  readonly endsS: readonly number[];
  readonly dosesPct: readonly (readonly number[])[];
}

export function createDoseChart(
  target: HTMLElement,
  widthPx: number,
  first: DoseScene,
  callbacks: Callbacks,
): Chart<DoseScene, DoseData> {
  const scene = { ...first };
  let colours = readColours(target);
  let drawn: DoseData | null = null;
  const heightPx = Math.max(DOSES_PX, 30 + LABEL_STEP_PX * (first.lines.length + 1));

  function draw(chart: uPlot) {
    drawLeftOut(chart, scene.leftOut, colours);
    drawLimit(chart, dosePlace(100), colours);
    const last = Math.min(chart.valToIdx(scene.span.toS), chart.data[0].length - 1);
    const labels = scene.lines.flatMap(({ text, isStrong, look }, index): Label[] => {
      const place = chart.data[index + 1]?.[last];
      if (place == null) return [];
      const y = chart.valToPos(place, "y");
      return [{ y, text, colour: look.colour, dash: look.dash, mark: "line", isStrong }];
    });
    labels.push({
      y: chart.valToPos(dosePlace(100), "y"),
      text: scene.limitText,
      colour: "ink",
      mark: null,
    });
    drawLabels(chart, labels, colours);
  }

  const chart = new uPlot(
    {
      width: widthPx,
      height: heightPx,
      padding: [8, first.rightPx, 0, 0],
      legend: { show: false },
      cursor: cursorOptions(callbacks.onWhole),
      scales: {
        x: { time: false, auto: false },
        y: { auto: false, range: () => [0, dosePlace(scene.highPct)] },
      },
      axes: [
        xAxis(scene, () => colours, false),
        {
          ...yAxis(
            () => colours,
            () => doseTicks(scene.highPct).map(({ pct }) => dosePlace(pct)),
            () => "",
          ),
          values: () =>
            doseTicks(scene.highPct).map(({ pct, isNamed }) => (isNamed ? scene.pctText(pct) : "")),
        },
      ],
      series: [
        {},
        ...first.lines.map(
          ({ look }): uPlot.Series => ({
            scale: "y",
            stroke: () => colours[look.colour],
            dash: [...look.dash],
            width: 1.6,
            points: { show: false },
          }),
        ),
      ],
      hooks: hooksFor(callbacks, draw),
    },
    undefined,
    target,
  );

  return {
    over: chart.over,
    show(next, data) {
      Object.assign(scene, next);
      if (data && data !== drawn)
        chart.setData(
          [[...data.endsS], ...data.dosesPct.map((doses) => doses.map(dosePlace))],
          false,
        );
      drawn = data;
      chart.setScale("y", { min: 0, max: dosePlace(scene.highPct) });
      chart.setScale("x", { min: scene.span.fromS, max: scene.span.toS });
    },
    resize: (width) => chart.setSize({ width, height: heightPx }),
    repaint() {
      colours = readColours(target);
      chart.redraw();
    },
    point: (left) => chart.setCursor({ left, top: left < 0 ? -1 : 0 }, false),
    destroy: () => chart.destroy(),
  };
}
