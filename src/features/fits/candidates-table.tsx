import { useLingui } from "@lingui/react";
import { useState } from "react";
import { barToTrial } from "../../../shared/acoustics/protection/barred";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { withinSentence } from "../../../shared/format/words";
import type { Candidate, RefusalView } from "../../../shared/schemas/fit";
import { exclusionWord, ownFitWord } from "../../../shared/words/register-words";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextButton } from "../../components/link";
import { ProtectorWord, protectorWordText } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import { type ActiveCredit, decidedWord, judgedByWord, refusedWord } from "./fit-words";

/** As many as `candidates.css` leaves in sight. */
const SHOWN_ON_PHONE = 4;

/** A device, or two of them, among candidates. */
export const candidateKey = ({
  modelId,
  outerModelId,
}: Pick<Candidate, "modelId" | "outerModelId">): string =>
  outerModelId === null ? modelId : `${modelId} ${outerModelId}`;

/** At which confidence the margins are compared: labels and own fits at the same. */
function MarginNote({ candidates }: { candidates: readonly Candidate[] }) {
  const { i18n } = useLingui();
  const shown = candidates.find(({ marginDb }) => marginDb !== null);
  if (!shown) return null;
  return (
    <p className="beneath">
      {shown.marginSharePct === null
        ? i18n.t(
            "Margin: for the share of users that the rule’s own method protects, labels and own fits alike.",
          )
        : i18n.t("Margin: for {pct} % of users, labels and own fits alike.", {
            pct: shown.marginSharePct,
          })}
    </p>
  );
}

/** The first of those of which nothing is known, or of which none will do, suits no better than the others. */
const doesSuit = ({ word, wornDb }: Candidate): boolean =>
  wornDb !== null && word !== "too-little" && word !== "too-much";

/** What the worker refused or can't wear of it, as was last said of each: it can be chosen all the same. */
function Refused({
  row: { modelId, outerModelId, excludedBy },
  refusals,
}: {
  row: Candidate;
  refusals: readonly RefusalView[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  // Then it stands there already as what puts it out of the question.
  if (excludedBy?.code === "cannot-wear") return null;
  return [modelId, outerModelId].map((id) => {
    const latest = refusals.find((one) => one.modelId !== null && one.modelId === id);
    if (!latest || latest.kind === "not-worn") return null;
    return (
      <span key={id} className="is-fault">
        {[outerModelId !== null && latest.modelName, refusedWord(i18n, latest, locale)]
          .filter(Boolean)
          .join(": ")}
      </span>
    );
  });
}

/** The register in the order in which it suits a noise, each with the comparison that decided. */
export function CandidatesTable({
  candidates,
  caption,
  inHead,
  chosen,
  pickWord,
  pickLabel,
  onPick,
  foldsOnPhone = false,
  hasOwnFit = true,
  refusals = [],
  activeCredit,
}: {
  candidates: readonly Candidate[];
  caption: string;
  /** Over those that are not out of the question. */
  inHead: string;
  /** `candidateKey` of the one that was picked. */
  chosen: string;
  /** What picking one does, in a word on the button; absent: nothing is to be picked here. */
  pickWord?: string;
  /** The same with the name of what is picked, for the ear. */
  pickLabel?: (name: string) => string;
  onPick?: (candidate: Candidate) => void;
  /** On a phone only the first and the one picked are shown, until the rest is asked for: other things stand below. */
  foldsOnPhone?: boolean;
  hasOwnFit?: boolean;
  /** Of the one worker who stands there, the latest first. */
  refusals?: readonly RefusalView[];
  activeCredit: ActiveCredit;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [showsAll, setShowsAll] = useState(false);
  const isFolded = foldsOnPhone && !showsAll;
  const atMost = (db: number, isMost: boolean) =>
    formatLevel(db, locale, isMost ? "upper" : "exact");
  const less7 = (db: number) => i18n.t("rating − 7: {level}", { level: formatLevel(db, locale) });
  const columns: DataColumn<Candidate>[] = [
    {
      id: "device",
      head: i18n.t("Device"),
      isRowHead: true,
      cell: (row) => (
        <span className="two-lines">
          <span className="is-name">{row.name}</span>
          <span className="beneath">
            {row.excludedBy
              ? exclusionWord(i18n, row.excludedBy)
              : [
                  (row.decidedBy !== "first" || doesSuit(row)) && decidedWord(i18n, row.decidedBy),
                  (row.decidedBy === "margin" || row.decidedBy === "least-margin") &&
                    row.marginDb !== null &&
                    formatLevelChange(row.marginDb, locale),
                  judgedByWord(i18n, row, activeCredit),
                ]
                  .filter(Boolean)
                  .join(", ")}
          </span>
          <Refused row={row} refusals={refusals} />
        </span>
      ),
    },
    {
      id: "word",
      head: i18n.t("While worn"),
      unit: "dB",
      cell: ({
        word,
        wornDb,
        wornActiveDb,
        wornIn,
        twaDb,
        isWornMost,
        isTwaMost,
        scaleWord,
        scaleIn,
      }) => (
        <ProtectorWord
          word={word}
          beneath={
            wornDb === null
              ? undefined
              : [
                  wornActiveDb === null
                    ? `${wornIn ?? ""} ${atMost(wornDb, isWornMost)}`.trim()
                    : i18n.t("{task} {off}, with the active part on {on}", {
                        task: wornIn ?? "",
                        off: atMost(wornDb, isWornMost),
                        on: atMost(wornActiveDb, isWornMost),
                      }),
                  twaDb !== null && i18n.t("shift {twa}", { twa: atMost(twaDb, isTwaMost) }),
                  scaleWord !== null &&
                    i18n.t("by EN 458 {word} in {task}", {
                      word: withinSentence(protectorWordText(i18n, scaleWord), locale),
                      task: scaleIn ?? wornIn ?? "",
                    }),
                ]
                  .filter(Boolean)
                  .join(", ")
          }
        />
      ),
    },
    {
      id: "margin",
      head: i18n.t("Margin"),
      unit: "dB",
      kind: "figure",
      cell: ({ marginDb }) => formatLevelChange(marginDb, locale),
    },
    {
      id: "fit",
      head: i18n.t("Own fit"),
      cell: ({ lastFit, labelLess7Db, isActiveCredited }) =>
        lastFit === null ? (
          labelLess7Db === null ? (
            "–"
          ) : (
            <span className="two-lines">
              –<span className="beneath wide:whitespace-nowrap">{less7(labelLess7Db)}</span>
            </span>
          )
        ) : (
          <span className="two-lines">
            <span className="mono">{formatLevel(lastFit.parDb, locale)}</span>
            <span className={lastFit.hasPassed === false ? "is-fault" : "beneath"}>
              {ownFitWord(i18n, lastFit, isActiveCredited)}
            </span>
            {labelLess7Db !== null && (
              <span className="beneath wide:whitespace-nowrap">{less7(labelLess7Db)}</span>
            )}
          </span>
        ),
    },
    {
      id: "stock",
      head: i18n.t("In stock"),
      kind: "figure",
      cell: ({ stock }) => stock ?? "–",
    },
  ];
  if (candidates.some(({ batteryMin }) => batteryMin !== null))
    columns.push({
      id: "battery",
      head: i18n.t("Battery"),
      kind: "right",
      cell: ({ batteryMin, batteryLasts }) =>
        batteryMin === null ? (
          "–"
        ) : (
          <span className={batteryLasts === false ? "is-fault" : undefined}>
            {formatDuration(batteryMin, locale)}
          </span>
        ),
    });
  if (pickWord !== undefined)
    columns.push({
      id: "pick",
      head: <span className="sr-only">{pickWord}</span>,
      kind: "right",
      // What does not go, or is no longer in use, is not held out; what a trial could show is, more quietly.
      cell: (row) => {
        const wires = { "aria-label": pickLabel?.(row.name), onClick: () => onPick?.(row) };
        if (row.excludedBy === null) return <Button {...wires}>{pickWord}</Button>;
        return barToTrial(row) === null ? <TextButton {...wires}>{pickWord}</TextButton> : null;
      },
    });
  return (
    <>
      <div className={`candidates${isFolded ? " is-folded" : ""}`}>
        <DataTable<Candidate>
          caption={caption}
          rows={candidates}
          rowKey={candidateKey}
          columns={hasOwnFit ? columns : columns.filter(({ id }) => id !== "fit")}
          isTwoLine
          stacksOnPhone
          isSelected={(row) => candidateKey(row) === chosen}
          groupOf={({ excludedBy }) =>
            excludedBy
              ? { key: "out", label: i18n.t("Out of the question") }
              : { key: "in", label: inHead }
          }
          empty={<Empty title={i18n.t("No protector is on the register yet.")} />}
        />
        {foldsOnPhone && candidates.length > SHOWN_ON_PHONE && (
          <TextButton
            className="candidates-more"
            aria-expanded={!isFolded}
            onClick={() => setShowsAll(!showsAll)}
          >
            {isFolded
              ? i18n.t("All {number} devices", { number: candidates.length })
              : i18n.t("Show fewer")}
          </TextButton>
        )}
      </div>
      <MarginNote candidates={candidates} />
    </>
  );
}
