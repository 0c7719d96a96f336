import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { formatInstantsApart } from "../../../shared/format/date";
import { withinSentence } from "../../../shared/format/words";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { FindingKind, FindingState } from "../../../shared/schemas/finding";
import type { ResultView } from "../../../shared/schemas/result";
import { TextButton, TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { otherResultWords } from "./earlier-words";

/** In the margin of a working's head: which it is, by which versions, what was found, what stood before. */
export function ResultFacts({
  result,
  workingName,
  csv,
}: {
  result: ResultView;
  workingName: string;
  csv?: ReactNode;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const ruleSet = ruleSetVersion(result.governing.key, result.governing.version);
  const all = [result, ...result.earlier];
  const instants = formatInstantsApart(
    all.map(({ computedAt }) => computedAt),
    result.timeZone,
    locale,
  );
  const at = (id: string) => instants[all.findIndex((one) => one.id === id)] ?? "";
  return (
    <aside className="working-margin" aria-label={i18n.t("About this working")}>
      <p>
        <b>{i18n.t("Working {name}", { name: workingName })}</b>
        <br />
        {i18n.t("Method version {version}, computed {at}", {
          version: result.methodVersion,
          at: at(result.id),
        })}
        <br />
        {ruleSet &&
          i18n.t("{title}, rule set version {version}", {
            title: ruleSet.citation,
            version: ruleSet.version,
          })}
      </p>
      <p className="note-links no-print">
        <TextButton onClick={() => window.print()}>{i18n.t("Print")}</TextButton>
        {csv}
      </p>
      {result.earlier.map((one) => (
        <p key={one.id} className="no-print">
          <TextLink
            to={
              one.isCurrent
                ? paths.result(result.worker.id, result.date)
                : paths.storedResult(one.id)
            }
          >
            {one.isCurrent
              ? i18n.t("The result that stands now")
              : i18n.t("Earlier result, {at}", { at: at(one.id) })}
          </TextLink>
          : {otherResultWords(i18n, one, result)}
        </p>
      ))}
      {result.findings.length > 0 && (
        <p>
          <b>{i18n.t("Findings.")}</b>{" "}
          {result.findings.map((finding, index) => (
            <span key={finding.id}>
              {index > 0 && "; "}
              <TextLink to={paths.finding(finding.id)}>
                {findingWord(i18n, finding.kind as FindingKind)}
              </TextLink>
              {`: ${withinSentence(findingStateWord(i18n, finding.state as FindingState), locale)}`}
            </span>
          ))}
        </p>
      )}
      {result.input && (
        <p>
          {i18n.t(
            "The lines are judged apart. Action values count the noise without protection; a limit at the ear counts the protector; the protector itself is judged while worn, task by task.",
          )}
        </p>
      )}
    </aside>
  );
}
