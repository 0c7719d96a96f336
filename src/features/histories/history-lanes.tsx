import { useLingui } from "@lingui/react";
import {
  type CSSProperties,
  type KeyboardEvent,
  type PointerEvent,
  useEffect,
  useId,
  useRef,
  useState,
} from "react";
import { formatMinutes } from "../../../shared/format/duration";
import { useLocale } from "../../lib/i18n";
import { LEFT_PX, RIGHT_PX } from "./chart-canvas";
import type { HistoryClock } from "./history-clock";
import type { Span } from "./history-span";
import {
  type Drawn,
  type Edge,
  moveStretch,
  type Placed,
  resizeStretch,
  type StretchKind,
  snap,
  snapStepS,
  stretchBetween,
} from "./history-stretches";
import { rangeText, stretchName } from "./history-words";
import { nameRows } from "./name-rows";

/** So near an end of a bracket one takes hold of the end. */
const GRIP_PX = 9;
/** A pointer that moved less only pressed. */
const SLIP_PX = 4;
/** Of names under tasks: more than a letter's mean width, and what stays free between two, in parts of the page's letters. */
const LETTER_REM = 0.44;
const NAME_GAP_REM = 0.5;
/** Left of a name within its bracket. */
const NAME_INSET_PX = 3;
/** With more rows the lane would be a list, and that stands beneath anyway. */
const MOST_NAME_ROWS = 4;
const STEP_S = 60;
const LONG_STEP_S = 600;

/** How far a name may reach: a reason up to the next one, a task's name in its row. */
interface NameStyle {
  "--room": string;
  "--name-row": number;
  "--name-left": string;
  "--name-room": string;
}

interface Hold {
  readonly kind: "draw" | "move" | Edge;
  readonly stretchKind: StretchKind;
  readonly key: string | null;
  readonly startX: number;
  readonly startS: number;
  readonly before: readonly Drawn[];
  hasMoved: boolean;
}

export interface LanesProps {
  readonly span: Span;
  readonly clock: HistoryClock;
  readonly intervalS: number;
  readonly drawn: readonly Drawn[];
  readonly taskNames: Readonly<Record<string, string>>;
  readonly canChange: boolean;
  readonly openKey: string | null;
  /** A bracket whose form is open and that is not drawn yet. */
  readonly pending: (Span & { readonly kind: StretchKind }) | null;
  /** What just happened to a bracket, said elsewhere to those who hear it. */
  readonly word: string;
  readonly widthPx: number;
  readonly rightPx: number;
  /** `isDone`: the hand let go; until then it only shows where it would stand. */
  readonly onChange: (placed: Placed, isDone: boolean) => void;
  readonly onOpen: (key: string) => void;
  readonly onRemove: (key: string) => void;
  readonly onDraw: (kind: StretchKind, place: Span) => void;
}

/** Brackets of tasks under the chart, and what is left out beneath them; drawn and moved by hand and by keys. */
export function HistoryLanes(props: LanesProps) {
  const { i18n } = useLingui();
  const hintId = useId();
  return (
    <div className="shift-lanes">
      <Lane {...props} kind="task" label={i18n.t("Tasks")} hintId={hintId} />
      <Lane {...props} kind="left-out" label={i18n.t("Left out")} hintId={hintId} />
      <p className="shift-lane-word" aria-hidden="true">
        {props.word}
      </p>
      <p className="sr-only" id={hintId}>
        {props.canChange
          ? i18n.t(
              "Arrow keys move it by a minute, with Shift by ten; with Alt they move its end. Enter opens it, Delete removes it.",
            )
          : ""}
      </p>
    </div>
  );
}

function Lane({
  span,
  clock,
  intervalS,
  drawn,
  taskNames,
  canChange,
  openKey,
  pending,
  widthPx,
  rightPx,
  onChange,
  onOpen,
  onRemove,
  onDraw,
  kind,
  label,
  hintId,
}: LanesProps & { kind: StretchKind; label: string; hintId: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const track = useRef<HTMLDivElement>(null);
  const hold = useRef<Hold | null>(null);
  const [draft, setDraft] = useState<Span | null>(null);
  const { lengthS, startMs } = clock;
  const spanS = span.toS - span.fromS;
  const stepS = snapStepS(spanS, intervalS);
  const limits = { lengthS, shortestS: intervalS };

  const secondsAt = (clientX: number): number => {
    const { left = 0, width = 1 } = track.current?.getBoundingClientRect() ?? {};
    return span.fromS + ((clientX - left) / width) * spanS;
  };
  const snapped = (atS: number) => snap(atS, stepS, startMs, lengthS);

  function takeHold(event: PointerEvent, key: string | null, ofHold: Hold["kind"]) {
    if (!canChange || event.button !== 0) return;
    hold.current = {
      kind: ofHold,
      stretchKind: kind,
      key,
      startX: event.clientX,
      startS: secondsAt(event.clientX),
      before: drawn,
      hasMoved: false,
    };
    track.current?.setPointerCapture(event.pointerId);
  }

  function placeOf(held: Hold, clientX: number): Placed | null {
    const one = held.before.find(({ key }) => key === held.key);
    if (!one) return null;
    const byS = secondsAt(clientX) - held.startS;
    if (held.kind === "move")
      return moveStretch(held.before, one.key, snapped(one.fromS + byS) - one.fromS, lengthS);
    if (held.kind === "draw") return null;
    const edgeS = held.kind === "from" ? one.fromS : one.toS;
    return resizeStretch(held.before, one.key, held.kind, snapped(edgeS + byS), limits);
  }

  function onPointerMove(event: PointerEvent) {
    const held = hold.current;
    if (!held) return;
    if (!held.hasMoved && Math.abs(event.clientX - held.startX) < SLIP_PX) return;
    held.hasMoved = true;
    if (held.kind === "draw") {
      setDraft(
        stretchBetween(
          held.before,
          kind,
          snapped(held.startS),
          snapped(secondsAt(event.clientX)),
          lengthS,
        ),
      );
      return;
    }
    const placed = placeOf(held, event.clientX);
    if (placed) onChange(placed, false);
  }

  function onPointerUp(event: PointerEvent) {
    const held = hold.current;
    hold.current = null;
    setDraft(null);
    if (!held) return;
    if (held.kind === "draw") {
      if (draft && draft.toS > draft.fromS) onDraw(kind, draft);
      return;
    }
    if (!held.hasMoved) {
      if (held.key !== null) onOpen(held.key);
      return;
    }
    const placed = placeOf(held, event.clientX);
    if (placed) onChange(placed, true);
  }

  function letGo() {
    const held = hold.current;
    hold.current = null;
    setDraft(null);
    if (held?.hasMoved && held.kind !== "draw")
      onChange({ drawn: held.before, stoppedBy: null }, true);
  }

  function onBracketKey(event: KeyboardEvent, one: Drawn) {
    // Plus, minus and Home are the picture's.
    const isArrow = event.key === "ArrowLeft" || event.key === "ArrowRight";
    if (isArrow) event.stopPropagation();
    if (event.key === "Enter" || event.key === " ") {
      event.preventDefault();
      onOpen(one.key);
      return;
    }
    if (!canChange || event.ctrlKey || event.metaKey) return;
    if (event.key === "Delete" || event.key === "Backspace") {
      event.preventDefault();
      onRemove(one.key);
      return;
    }
    if (!isArrow) return;
    event.preventDefault();
    const byS = (event.shiftKey ? LONG_STEP_S : STEP_S) * (event.key === "ArrowLeft" ? -1 : 1);
    onChange(
      event.altKey
        ? resizeStretch(drawn, one.key, "to", one.toS + byS, limits)
        : moveStretch(drawn, one.key, byS, lengthS),
      true,
    );
  }

  /** The part that is seen: a name at the end of a bracket far out of sight could not be read. */
  const place = ({ fromS, toS }: Span) => {
    const [from, to] = [Math.max(fromS, span.fromS), Math.min(toS, span.toS)];
    return {
      left: `${(100 * (from - span.fromS)) / spanS}%`,
      width: `${(100 * (to - from)) / spanS}%`,
    };
  };
  /** A reason is longer than what it leaves out, and is read on up to the next one. */
  const roomFor = ({ fromS }: Span, next: Span | undefined) =>
    `${(100 * ((next?.fromS ?? span.toS) - Math.max(fromS, span.fromS))) / spanS}cqw`;
  const seen = drawn
    .filter((one) => one.kind === kind && one.toS > span.fromS && one.fromS < span.toS)
    .toSorted((a, b) => a.fromS - b.fromS);

  const names = seen.map((one) => stretchName(i18n, one, taskNames));
  const rooms = kind === "task" ? nameRooms() : [];
  const rowsCount = Math.max(1, ...rooms.map((room) => (room ? room.row + 1 : 1)));

  /** Where each task's name stands, as it may be longer than its bracket; null where it finds no room. */
  function nameRooms(): ({ x: number; row: number; from: number } | null)[] {
    const remPx = Number.parseFloat(getComputedStyle(document.documentElement).fontSize) || 16;
    const plotPx = Math.max(1, widthPx - LEFT_PX - rightPx);
    const asked = seen.map(({ fromS }, index) => ({
      from: (plotPx * (Math.max(fromS, span.fromS) - span.fromS)) / spanS + NAME_INSET_PX,
      text: names[index]!,
    }));
    const room = { letter: LETTER_REM * remPx, gap: NAME_GAP_REM * remPx, width: plotPx };
    return nameRows(asked, room).map(({ x, row }, index) =>
      row < MOST_NAME_ROWS ? { x, row, from: asked[index]!.from } : null,
    );
  }
  const nameStyle = (index: number): NameStyle => {
    const room = rooms[index];
    return {
      "--room": roomFor(seen[index]!, seen[index + 1]),
      "--name-row": room?.row ?? 0,
      "--name-left": `${NAME_INSET_PX + (room ? room.x - room.from : 0)}px`,
      "--name-room": room ? `${names[index]!.length * LETTER_REM}rem` : "0px",
    };
  };

  const ghost = draft ?? (pending?.kind === kind ? pending : null);

  return (
    <div className={`shift-lane is-${kind}`} style={{ "--name-rows": rowsCount } as CSSProperties}>
      {/* biome-ignore lint/a11y/useSemanticElements: brackets are buttons, not fields */}
      <div
        className={`shift-track${canChange ? " can-draw" : ""}`}
        ref={track}
        role="group"
        aria-label={label}
        style={{ marginLeft: LEFT_PX, marginRight: rightPx }}
        onPointerDown={(event) => {
          if (event.target === track.current) takeHold(event, null, "draw");
        }}
        onPointerMove={onPointerMove}
        onPointerUp={onPointerUp}
        onPointerCancel={letGo}
      >
        {seen.map((one, index) => {
          const name = names[index]!;
          const minutes = formatMinutes((one.toS - one.fromS) / 60, locale);
          const range = rangeText(clock, one);
          return (
            <Bracket
              key={one.key}
              bracketKey={one.key}
              className={`bracket is-${kind}${one.key === openKey ? " is-open" : ""}`}
              cut={{ from: one.fromS < span.fromS, to: one.toS > span.toS }}
              style={{ ...place(one), ...nameStyle(index) }}
              label={i18n.t("{name}, {range}, {minutes} min", { name, range, minutes })}
              hintId={hintId}
              onKeyDown={(event) => onBracketKey(event, one)}
              onOpen={() => onOpen(one.key)}
              canChange={canChange}
              onHold={(event, grip) => takeHold(event, one.key, grip)}
            >
              {name}
            </Bracket>
          );
        })}
        {ghost && <span className={`bracket is-${kind} is-draft`} style={place(ghost)} />}
      </div>
      <span
        className="shift-lane-name"
        style={
          rightPx === RIGHT_PX
            ? { width: rightPx - 8 }
            : { left: 0, right: "auto", width: LEFT_PX - 4 }
        }
        aria-hidden="true"
      >
        {label}
      </span>
    </div>
  );
}

function Bracket({
  bracketKey,
  className: kindOf,
  cut,
  style,
  label,
  hintId,
  onKeyDown,
  onOpen,
  canChange,
  onHold,
  children,
}: {
  bracketKey: string;
  className: string;
  /** Ends that lie beyond what is seen. */
  cut: Readonly<Record<Edge, boolean>>;
  style: { left: string; width: string } & NameStyle;
  label: string;
  hintId: string;
  onKeyDown: (event: KeyboardEvent) => void;
  onOpen: () => void;
  canChange: boolean;
  onHold: (event: PointerEvent, grip: "move" | Edge) => void;
  children: string;
}) {
  const button = useRef<HTMLButtonElement>(null);
  const className = `${kindOf}${cut.from ? " is-cut-from" : ""}${cut.to ? " is-cut-to" : ""}`;
  const gripAt = (clientX: number): "move" | Edge => {
    const { left = 0, right = 0, width = 0 } = button.current?.getBoundingClientRect() ?? {};
    // A short bracket is still to be moved: its ends then reach inwards less far.
    const reach = Math.min(GRIP_PX, width / 3);
    if (clientX - left <= reach && !cut.from) return "from";
    return right - clientX <= reach && !cut.to ? "to" : "move";
  };
  useEffect(() => {
    const element = button.current;
    if (!element || !canChange) return;
    const onMove = (event: globalThis.PointerEvent) => {
      if (event.buttons === 0)
        element.style.cursor = gripAt(event.clientX) === "move" ? "grab" : "ew-resize";
    };
    element.addEventListener("pointermove", onMove);
    return () => element.removeEventListener("pointermove", onMove);
  });
  if (!canChange)
    return (
      <span className={className} style={style} title={label} role="img" aria-label={label}>
        <span className="bracket-name">{children}</span>
      </span>
    );
  return (
    <button
      type="button"
      ref={button}
      data-bracket={bracketKey}
      className={className}
      style={style}
      title={label}
      aria-label={label}
      aria-describedby={hintId}
      onKeyDown={onKeyDown}
      // The press itself is the track's: it may become a move. A click without a pointer is a screen reader's.
      onClick={(event) => {
        if (event.detail === 0) onOpen();
      }}
      onPointerDown={(event) => onHold(event, gripAt(event.clientX))}
    >
      <span className="bracket-name">{children}</span>
    </button>
  );
}
