import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatChance } from "../../../shared/format/dose";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import { withinSentence } from "../../../shared/format/words";
import type { Locale } from "../../../shared/i18n";
import type { GroupBlock, GroupStatistics } from "../../../shared/schemas/group";
import { DataTable } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { Section } from "../../components/page";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { ProbabilityPlot } from "./probability-plot";

/** What speaks against the figures. */
export function warningWords(i18n: I18n, reason: string): string {
  switch (reason) {
    case "few-samples":
      return i18n.t("Fewer than six samples: these figures say little yet.");
    case "too-few-samples":
      return i18n.t("One sample has no scatter: there is no limit to state.");
    case "too-few-values":
      return i18n.t("Too few samples lie above their threshold for a distribution.");
    case "mostly-below-threshold":
      return i18n.t("Most samples lie below their threshold: nothing can be fitted to them.");
    default:
      return i18n.t(
        "Some samples lie below their threshold; limit and bound are then approximations.",
      );
  }
}

/** The plain verdict on whether the members belong together. */
export function belongingWords(
  i18n: I18n,
  { verdict, reason }: Pick<GroupStatistics["belonging"], "verdict" | "reason">,
): string {
  switch (verdict) {
    case "differ":
      return i18n.t("They do not belong together: make a second job.");
    case "no-difference-shown":
      return i18n.t("No difference between them shows.");
    case "cant-tell":
      return reason === "one-worker"
        ? i18n.t("It can’t be told: only one member was measured.")
        : reason === "no-repeats"
          ? i18n.t("It can’t be told: nobody was measured twice.")
          : i18n.t("It can’t be told: the samples do not scatter.");
  }
}

/** "8-hour TWA, 5 dB, threshold 80", or "LEX,8h": what a block's levels are. */
export function figureTitle(
  i18n: I18n,
  { quantity, exchangeRateDb, thresholdDb }: Omit<GroupBlock, "statistics" | "leftOutCount">,
  locale: Locale,
): string {
  if (quantity === "lex-8h") return "LEX,8h";
  const exchange = exchangeRateDb ?? 0;
  return thresholdDb === null
    ? i18n.t("8-hour TWA, {exchange} dB, no threshold", { exchange })
    : i18n.t("8-hour TWA, {exchange} dB, threshold {threshold}", {
        exchange,
        threshold: formatLimit(thresholdDb, locale),
      });
}

/** How often a value is passed. What a fit says beyond one in a thousand is no more than that. */
export function exceedanceWords(
  i18n: I18n,
  { share, shareUpTo }: { share: number; shareUpTo: number },
  locale: Locale,
): string {
  if (share > 0.999) return i18n.t("over {share} of days", { share: formatChance(99.9, locale) });
  if (shareUpTo < 0.001)
    return i18n.t("under {share} of days, with 95 % confidence", {
      share: formatChance(0.1, locale),
    });
  const bound = formatChance(100 * shareUpTo, locale);
  return share < 0.001
    ? i18n.t("under {share} of days, with 95 % confidence at most {bound}", {
        share: formatChance(0.1, locale),
        bound,
      })
    : i18n.t("{share} of days, with 95 % confidence at most {bound}", {
        share: formatChance(100 * share, locale),
        bound,
      });
}

/** What a group's samples say in one quantity: centre and scatter, how often a value is passed, and their plot. */
export function GroupFigures({ block, place }: { block: GroupBlock; place: number }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { statistics, leftOutCount } = block;
  const isEnergy = block.quantity === "lex-8h";
  if (!statistics) return null;
  const level = (levelDb: number | null) => formatLevel(levelDb, locale);
  const facts: [string, string][] = [
    [
      i18n.t("Samples"),
      i18n.t(
        "{count}, from {workers, plural, one {# worker} other {# workers}}{below, plural, =0 {} one {; # below its threshold} other {; # below their threshold}}",
        {
          count: statistics.sampleCount,
          workers: statistics.workerCount,
          below: statistics.belowCount,
        },
      ),
    ],
    [i18n.t("Mean"), `${level(statistics.meanDb)} dB`],
    [i18n.t("Standard deviation"), `${level(statistics.sdDb)} dB`],
    ...(isEnergy
      ? [[i18n.t("Energy mean"), `${level(statistics.energyMeanDb)} dB`] as [string, string]]
      : []),
    [
      i18n.t("95 % of days lie below, with 95 % confidence"),
      statistics.toleranceFactor === null
        ? "–"
        : i18n.t("{limit} dB (K = {factor})", {
            limit: level(statistics.toleranceLimitDb),
            factor: formatNumber(statistics.toleranceFactor, 3, locale),
          }),
    ],
    ...statistics.exceedances.map((one): [string, string] => [
      i18n.t("Above {level}, {label}", {
        level: formatLimit(one.levelDb, locale),
        label: withinSentence(i18n._(one.label), locale),
      }),
      exceedanceWords(i18n, one, locale),
    ]),
  ];
  return (
    <Section title={figureTitle(i18n, block, locale)} id={`figures-${place}`}>
      {leftOutCount > 0 && (
        <p className="group-kept">
          {i18n.t(
            "{count, plural, one {# day has} other {# days have}} only a lower bound and stay out.",
            { count: leftOutCount },
          )}
        </p>
      )}
      {statistics.reasons.map((reason) => (
        <p key={reason} className="group-kept">
          <b>{warningWords(i18n, reason)}</b>
        </p>
      ))}
      <dl className="facts">
        {facts.map(([label, value]) => (
          <div key={label}>
            <dt>{label}</dt>
            <dd>
              <b>{value}</b>
            </dd>
          </div>
        ))}
      </dl>
      {statistics.plot.length > 0 && (
        <>
          <h3 className="plot-title">{i18n.t("Probability plot")}</h3>
          <ProbabilityPlot statistics={statistics} />
        </>
      )}
    </Section>
  );
}

/** Whether a group's members are alike, and who stands apart. */
export function MembersAlike({ statistics }: { statistics: GroupStatistics }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { belonging, outliers } = statistics;
  const level = (levelDb: number | null) => formatLevel(levelDb, locale);
  const share = (value: number) => formatChance(100 * value, locale);
  return (
    <Section title={i18n.t("Do its members belong together?")} id="belonging">
      <p className="group-figure">
        <b>{belongingWords(i18n, belonging)}</b>
      </p>
      {belonging.betweenDb !== null && (
        <p className="group-kept">
          {i18n.t(
            "Between workers {between} dB, from day to day within one {within} dB: {share} of the variance lies between workers. 95 % of such workers’ long-term means lie within {span} dB.",
            {
              between: level(belonging.betweenDb),
              within: level(belonging.withinDb),
              share: share(belonging.betweenShare ?? 0),
              span: level(belonging.workerSpanDb),
            },
          )}{" "}
          {belonging.f !== null &&
            belonging.probability !== null &&
            i18n.t("F = {f}; as great by chance: {probability}.", {
              f: formatNumber(belonging.f, 2, locale),
              probability: share(belonging.probability),
            })}
        </p>
      )}
      {belonging.verdict === "no-difference-shown" && (
        <p className="beneath">{i18n.t("That none shows does not prove that there is none.")}</p>
      )}
      <DataTable<GroupStatistics["outliers"]["workers"][number]>
        caption={i18n.t("Workers by their mean, the loudest first")}
        rows={outliers.workers}
        rowKey={({ workerId, meanDb, sampleCount }) => `${workerId} ${meanDb} ${sampleCount}`}
        columns={[
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            cell: ({ workerId, workerName }) =>
              workerId ? <TextLink to={paths.worker(workerId)}>{workerName}</TextLink> : "–",
          },
          {
            id: "samples",
            head: i18n.t("Samples"),
            kind: "figure",
            cell: ({ sampleCount }) => sampleCount,
          },
          {
            id: "mean",
            head: i18n.t("Mean"),
            unit: "dB",
            kind: "figure",
            cell: ({ meanDb }) => level(meanDb),
          },
          {
            id: "apart",
            head: i18n.t("Stands apart?"),
            cell: ({ isOutlier, distance }) =>
              isOutlier ? (
                <b>{i18n.t("yes")}</b>
              ) : distance === null ? (
                <span className="not-assessed">{i18n.t("can’t be told")}</span>
              ) : (
                i18n.t("no")
              ),
          },
        ]}
      />
      {outliers.critical !== null && (
        <p className="table-foot">
          {i18n.t(
            "Grubbs’ test at 5 %: apart is who lies further than {critical} standard deviations from the mean of the workers.",
            { critical: formatNumber(outliers.critical, 2, locale) },
          )}
          {outliers.leftAsideCount > 0 &&
            ` ${i18n.t("{count, plural, one {# worker is} other {# workers are}} left aside for a sample below its threshold.", { count: outliers.leftAsideCount })}`}
        </p>
      )}
    </Section>
  );
}
