import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { remedyOf, remedyWords } from "../../../shared/findings/facts";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { noticedSentence, orderSentence, remedyFigure } from "../../../shared/findings/sentences";
import { findingWord } from "../../../shared/findings/words";
import { formatDate, formatDay } from "../../../shared/format/date";
import { formatLimit } from "../../../shared/format/level";
import { startsSentence } from "../../../shared/format/words";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import type { CrewSheetRow } from "../../../shared/schemas/crew";
import type { DayFigures } from "../../../shared/schemas/finding";
import { outsideVerdict, outsideWords } from "../../components/day-figures";
import { DropStrip } from "../../components/drop-strip";
import { LevelFigure } from "../../components/level-figure";
import { protectorWordText } from "../../components/protector-word";
import { type StripFrame, stripOfDay } from "../../components/strip-of-day";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import { employerWords, lentWords } from "./beside-name";
import { OrderActions } from "./order-actions";
import type { SheetOrder } from "./queries";
import { asksAboutDay, expectedFault, type PartName, sheetVerdict } from "./sheet-parts";

const STRIP_PX = 200;

/** Figure, strip, figure: as the ticks stand, at the ear left and without protection right. */
function Figures({
  figures,
  frame,
  isExpected,
  isFlagged,
}: {
  figures: DayFigures;
  frame: StripFrame;
  isExpected: boolean;
  isFlagged: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const strip = stripOfDay(figures, frame);
  return (
    <div className="sheet-figures">
      <LevelFigure
        levelDb={figures.atEarDb}
        bound={figures.atEarBound}
        uncertaintyDb={isFlagged ? strip.atEarUDb : null}
        isStrong
      />
      <DropStrip
        {...strip}
        isExpected={isExpected}
        variant="list"
        widthPx={STRIP_PX}
        k={isFlagged ? 1.5 : 1.15}
        outsideWords={outsideWords(i18n, locale, figures)}
      />
      <LevelFigure
        levelDb={figures.outsideDb}
        bound={figures.outsideBound}
        uncertaintyDb={isFlagged ? strip.outsideUDb : null}
      />
    </div>
  );
}

/** What stands at the right of a name. */
function RowWord({
  row,
  part,
  frame,
}: {
  row: CrewSheetRow;
  part: PartName;
  frame: StripFrame | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { figures, order } = row;
  if (part === "last" && figures && frame) {
    const verdict = sheetVerdict(figures, frame.hasLimitAtEar);
    const [limit] = frame.limits;
    if (verdict === "over" && frame.hasLimitAtEar && limit)
      return (
        <Verdict verdict="over">
          {i18n.t("Over {value}", { value: formatLimit(limit.levelDb, locale) })}
        </Verdict>
      );
    if (verdict === "over" && figures.word !== "too-little") return <Verdict verdict="over" />;
    if (verdict === "over") return <b>{i18n.t("Protects too little")}</b>;
    if (verdict === "cant-tell-yet" || verdict === "not-assessed")
      return <Verdict verdict={verdict} />;
  }
  const fault = part === "expected" ? expectedFault(row) : null;
  if (fault) return <b>{findingWord(i18n, fault)}</b>;
  if (part === "last" && order && figures && asksAboutDay(row))
    return <b>{findingWord(i18n, order.kind)}</b>;
  if (!figures) return <Verdict verdict="not-assessed" />;
  if (figures.word !== null) {
    const isFault = figures.word === "too-little" || figures.word === "too-much";
    const text = protectorWordText(i18n, figures.word);
    return isFault ? <b>{text}</b> : <span>{text}</span>;
  }
  if (figures.hasProtector === "no")
    return <span>{outsideVerdict(i18n, locale, figures).words}</span>;
  return <Verdict verdict="not-assessed" />;
}

/** Whose employee somebody is, and between which crews they are lent. */
function BesideName({
  row: { worker, isLoan, lentBy, lentTo, figures },
  part,
}: {
  row: CrewSheetRow;
  part: PartName;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = [
    employerWords(i18n, worker),
    isLoan &&
      (lentBy?.crewName
        ? i18n.t("on loan from {crew}", { crew: isolate(lentBy.crewName) })
        : i18n.t("on loan")),
    lentTo && lentWords(i18n, locale, lentTo),
    // What they do here may be something else.
    isLoan && part === "expected" && figures && i18n.t("expected by their own job"),
  ].filter(Boolean);
  return words.length > 0 && <span className="sheet-loan"> {words.join(", ")}</span>;
}

/** An order of an earlier day beside the word of the day expected says of which day it is. */
function noticedOf(i18n: I18n, locale: Locale, order: SheetOrder, saysDay: boolean): string {
  const noticed = noticedSentence(i18n, locale, order.kind, order.facts);
  if (order.rulesUntil)
    return `${noticed}; ${i18n.t("under the rules before {date}", {
      date: formatDate(order.rulesUntil, locale),
    })}`;
  return saysDay && order.ofDate
    ? i18n.t("{day}: {sentence}", {
        day: startsSentence(formatDay(order.ofDate, locale), locale),
        sentence: noticed,
      })
    : noticed;
}

function Noticed({ order, saysDay = false }: { order: SheetOrder; saysDay?: boolean }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const remedy = remedyOf(order.facts);
  const figure = remedyFigure(locale, order.facts, (word) => protectorWordText(i18n, word));
  return (
    <>
      {i18n.t("{sentence}.", { sentence: noticedOf(i18n, locale, order, saysDay) })}
      {remedy && figure && (
        <>
          {" "}
          {i18n.t("{protector}: day {figure}.", { protector: remedyWords(i18n, remedy), figure })}
        </>
      )}
    </>
  );
}

/** What the day to come asks for: it goes by itself once that day is right, so that there is nothing to mark. */
function AheadOrder({ kind, facts }: NonNullable<CrewSheetRow["ahead"]>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = (sentence: string) => i18n.t("{sentence}.", { sentence });
  return (
    <>
      <div className="sheet-order">
        <div className="sheet-order-words">{words(orderSentence(i18n, locale, kind, facts))}</div>
        <span className="sheet-state">{i18n.t("Goes once the day is right")}</span>
      </div>
      <p className="sheet-noticed">{words(noticedSentence(i18n, locale, kind, facts))}</p>
    </>
  );
}

/** Why a day has no word for its protector, where there is something to say. */
const reasonOf = (figures: DayFigures) =>
  figures.word !== null || figures.hasProtector === "no" ? null : asReason(figures.reason);

export interface NextSheet {
  readonly date: string;
  readonly isToday: boolean;
}

function onNextSheet(i18n: I18n, locale: Locale, { date, isToday }: NextSheet, order: string) {
  return isToday
    ? i18n.t("{order}: on the sheet for today.", { order })
    : i18n.t("{order}: on the sheet for {day}.", { order, day: formatDay(date, locale) });
}

/** A worker on the sheet; one who is flagged has one order beneath. */
export function SheetRow({
  row,
  part,
  frame,
  crewId,
  timeZone,
  isFlagged,
  nextSheet = null,
  onStale,
}: {
  row: CrewSheetRow;
  part: PartName;
  frame: StripFrame | null;
  crewId: string;
  timeZone: string;
  isFlagged: boolean;
  /** Where the order is dealt with on the sheet for the shift to come: its date, and whether that is today. */
  nextSheet?: NextSheet | null;
  onStale: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { worker, figures, order } = row;
  const reason = figures && reasonOf(figures);
  const reasonWords = reason && reasonText(i18n, reason);
  return (
    <li className={`sheet-row${isFlagged ? " is-flagged" : ""}`}>
      <div className="sheet-name">
        <h3>
          {worker.name}
          <BesideName row={row} part={part} />
        </h3>
        <RowWord row={row} part={part} frame={frame} />
      </div>
      {figures && frame && (
        <Figures
          figures={figures}
          frame={frame}
          isExpected={part === "expected"}
          isFlagged={isFlagged}
        />
      )}
      {!figures && (
        <p className="sheet-noticed">
          {part === "expected"
            ? i18n.t("No nominal day is known, so nothing can be expected.")
            : i18n.t("No shift was entered.")}
        </p>
      )}
      {reasonWords && (
        <p className="sheet-noticed">{i18n.t("Because {reason}.", { reason: reasonWords })}</p>
      )}
      {isFlagged && row.ahead && <AheadOrder {...row.ahead} />}
      {isFlagged &&
        order &&
        (nextSheet ? (
          <>
            <div className="sheet-order">
              <div className="sheet-order-words">
                {onNextSheet(
                  i18n,
                  locale,
                  nextSheet,
                  orderSentence(i18n, locale, order.kind, order.facts),
                )}
              </div>
              <span className="sheet-state">
                {order.state === "new" || order.state === "came-back"
                  ? i18n.t("Not done yet")
                  : order.state === "done"
                    ? i18n.t("Done, to be checked")
                    : i18n.t("In hand")}
              </span>
            </div>
            <p className="sheet-noticed">
              <Noticed order={order} />
            </p>
          </>
        ) : (
          <OrderActions
            crewId={crewId}
            timeZone={timeZone}
            order={order}
            workerName={worker.name}
            onStale={onStale}
            words={i18n.t("{sentence}.", {
              sentence: orderSentence(i18n, locale, order.kind, order.facts),
            })}
            noticed={
              <Noticed order={order} saysDay={part === "expected" && expectedFault(row) === null} />
            }
          />
        ))}
      {isFlagged && !order && !row.ahead && (
        <p className="sheet-noticed">{i18n.t("Nothing for you to do; the officer looks at it.")}</p>
      )}
    </li>
  );
}
