import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { breakEvenHz } from "../../../shared/acoustics/protection/active";
import {
  type ActiveChart,
  type ActiveChartBand,
  activeChart,
} from "../../../shared/acoustics/protection/active-chart";
import { bandBelow } from "../../../shared/acoustics/protection/adequacy";
import type { ActivePart, RuleSetVersion, TaskLevel } from "../../../shared/acoustics/types";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { formatLevel, formatLevelChange, formatLimit } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import { isolate } from "../../../shared/i18n/isolate";
import { actionValueDb, ruleSetVersion } from "../../../shared/rule-sets";
import type { AtEarView } from "../../../shared/schemas/at-ear";
import { DataTable } from "../../components/data-table";
import { DropStrip } from "../../components/drop-strip";
import { Empty } from "../../components/empty";
import { protectorWordText } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import { useIsPhone } from "../../lib/use-is-phone";
import { BandLevels } from "./band-levels";

/** What the engine asks of a noise: level and spectrum; null: a noise of which nothing is known. */
export const noiseOf = (level: AtEarView["level"]): TaskLevel => ({
  revisionId: null,
  metric: { kind: "steady" },
  levelDb: level?.levelDb ?? 0,
  lcMinusLaDb: level?.lcMinusLaDb ?? null,
  octaveBandsDb: level?.octaveBandsDb ?? null,
  lasMaxDb: null,
  peak: null,
  samplesDb: [],
  instrument: null,
  grade: "estimate",
});

/** Which of the two the limit is judged on, and why. */
export function whichCounts(i18n: I18n, view: Pick<AtEarView, "creditsActivePart" | "worker">) {
  const { creditsActivePart, worker } = view;
  if (!creditsActivePart)
    return i18n.t("The part off: this site gives an active part no credit for a limit.");
  if (!worker)
    return i18n.t(
      "The part off; the part on only for a worker with a passed active check on record.",
    );
  return worker.activeCheckPassed
    ? i18n.t("The part on while the battery lasts: {name} passed the active check.", {
        name: isolate(worker.name),
      })
    : i18n.t("The part off: no passed active check of {name} is on record.", {
        name: isolate(worker.name),
      });
}

/** An active protector in one task's noise: by band what is outside, under it, and left with the active part on. */
export function ActiveInNoise({ view, active }: { view: AtEarView; active: ActivePart }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const ruleSet = ruleSetVersion(view.ruleSetKey, view.ruleSetVersion);
  const { level, inner, whileWorn } = view;
  const chart =
    level && inner.bands && ruleSet
      ? activeChart(noiseOf(level), inner.bands, active, ruleSet.protection.alpha)
      : null;
  const reason = asReason(level === null ? "level-missing" : (whileWorn.reason ?? "no-spectrum"));
  const total = (db: number | null, word: AtEarView["whileWorn"]["word"]) =>
    db === null
      ? null
      : `${formatLevel(db, locale)} dB(A)${word ? `, ${protectorWordText(i18n, word)}` : ""}`;
  const facts = [
    { key: "off", label: i18n.t("Part off"), value: total(whileWorn.offDb, whileWorn.word) },
    { key: "on", label: i18n.t("Part on"), value: total(whileWorn.onDb, whileWorn.wordOn) },
    { key: "counts", label: i18n.t("Counts for the limit"), value: whichCounts(i18n, view) },
    ...(chart && level
      ? [
          { key: "adds", label: i18n.t("Adds noise"), value: addsWords(i18n, chart, locale) },
          {
            key: "saturates",
            label: i18n.t("Saturates"),
            value: saturationWords(i18n, active, chart, level.levelDb, locale),
          },
        ]
      : []),
    {
      key: "ends",
      label: i18n.t("Credit ends"),
      value: endWords(i18n, active, locale),
    },
  ];
  return (
    <>
      {chart ? (
        <div className="picture-and-table">
          <BandLevels
            bands={chart.bands}
            title={i18n.t(
              "Noise by octave band outside, under cup or plug, and with the active part on; the table beside it says the same",
            )}
          />
          <ChartTable chart={chart} />
        </div>
      ) : (
        <Empty title={i18n.t("Not assessed by octave band.")}>
          {reason && i18n.t("Why: {reason}.", { reason: reasonText(i18n, reason) })}
        </Empty>
      )}
      {chart && ruleSet && <p className="review-lead">{basisWords(i18n, ruleSet, locale)}</p>}
      {whileWorn.offDb !== null && <TaskStrip view={view} />}
      <dl className="facts">
        {facts.map(({ key, label, value }) => (
          <div key={key}>
            <dt>{label}</dt>
            <dd className={value === null ? "not-assessed" : undefined}>
              {value ?? i18n.t("Not assessed")}
            </dd>
          </div>
        ))}
      </dl>
    </>
  );
}

/** The task alone, as all strips draw it: no limit and no verdict, the ring with the part on. */
function TaskStrip({ view: { level, whileWorn, ...view } }: { view: AtEarView }) {
  const isPhone = useIsPhone();
  const ruleSet = ruleSetVersion(view.ruleSetKey, view.ruleSetVersion);
  const actionDb = ruleSet ? actionValueDb(ruleSet) : null;
  return (
    <div className="at-ear-strip">
      <DropStrip
        variant="card"
        widthPx={isPhone ? 280 : 460}
        outsideDb={level?.levelDb ?? null}
        outsideUDb={null}
        outsideBound="exact"
        atEarDb={whileWorn.offDb}
        atEarBound="exact"
        atEarUDb={null}
        atEarActiveDb={whileWorn.onDb}
        atEarAsWorkedDb={null}
        whileWornDb={whileWorn.offDb}
        limits={[]}
        targetBand={actionDb === null ? null : bandBelow(actionDb)}
        isExpected={false}
        hasProtector="yes"
        word={whileWorn.word}
        verdict={null}
        isHidden
      />
    </div>
  );
}

function ChartTable({ chart }: { chart: ActiveChart }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const figure = (id: string, head: string, of: (band: ActiveChartBand) => string) => ({
    id,
    head,
    unit: "dB(A)",
    kind: "figure" as const,
    cell: of,
  });
  return (
    <DataTable<ActiveChartBand>
      caption={i18n.t("Noise by octave band, A-weighted")}
      rows={chart.bands}
      rowKey={({ frequencyHz }) => String(frequencyHz)}
      columns={[
        {
          id: "band",
          head: i18n.t("Band"),
          unit: "Hz",
          kind: "figure",
          isRowHead: true,
          cell: ({ frequencyHz }) => frequencyHz,
        },
        figure("outside", i18n.t("Outside"), (band) => formatLevel(band.outsideADb, locale)),
        figure("passive", i18n.t("Under it"), (band) => formatLevel(band.passiveADb, locale)),
        figure("active", i18n.t("Part on"), (band) => formatLevel(band.activeADb, locale)),
        {
          id: "gain",
          head: i18n.t("It changes"),
          unit: "dB",
          kind: "figure",
          cell: ({ gainDb, addsNoise }) =>
            addsNoise ? (
              <b>{formatLevelChange(-gainDb, locale)}</b>
            ) : (
              formatLevelChange(gainDb === 0 ? 0 : -gainDb, locale)
            ),
        },
      ]}
      foot={
        <tr>
          <th scope="row" className="is-figure">
            {i18n.t("Sum")}
          </th>
          <td className="is-figure">{formatLevel(chart.outsideDb, locale)}</td>
          <td className="is-figure">{formatLevel(chart.passiveDb, locale)}</td>
          <td className="is-figure">{formatLevel(chart.activeDb, locale)}</td>
          <td className="is-figure">
            {formatLevelChange(chart.activeDb - chart.passiveDb, locale)}
          </td>
        </tr>
      }
    />
  );
}

type Locale = ReturnType<typeof useLocale>;

function addsWords(i18n: I18n, { bands }: ActiveChart, locale: Locale): string {
  const adding = bands.filter(({ addsNoise }) => addsNoise);
  return adding.length === 0
    ? i18n.t("in no band")
    : i18n.t("{bands}: there it is louder with the part on", {
        bands: adding
          .map(
            ({ frequencyHz, gainDb }) =>
              `${frequencyHz} Hz ${formatLevelChange(-gainDb, locale)} dB`,
          )
          .join(", "),
      });
}

function saturationWords(
  i18n: I18n,
  { saturatesAboveDb }: ActivePart,
  { isSaturated }: ActiveChart,
  outsideDb: number,
  locale: Locale,
): string {
  if (saturatesAboveDb === null) return i18n.t("not stated");
  const values = {
    above: formatLevel(saturatesAboveDb, locale),
    outside: formatLevel(outsideDb, locale),
  };
  return isSaturated
    ? i18n.t("yes: {outside} dB(A) is more than {above}, and the part takes nothing off", values)
    : i18n.t("not here: {outside} dB(A) is no more than {above}", values);
}

function endWords(
  i18n: I18n,
  { delayS, gain, bandwidthHz, attenuationDb }: ActivePart,
  locale: Locale,
): string {
  if (attenuationDb === null && gain === 0) return i18n.t("at gain 0 the active part does nothing");
  const hz = (value: number) => formatNumber(value, 0, locale);
  const evenHz =
    attenuationDb === null && delayS !== null && gain !== null ? breakEvenHz(delayS, gain) : null;
  const words = [
    evenHz !== null &&
      i18n.t("from {hz} Hz on, where it breaks even: cos φ = g/2", { hz: hz(evenHz) }),
    bandwidthHz !== null && i18n.t("above its bandwidth of {hz} Hz", { hz: hz(bandwidthHz) }),
  ].filter((word) => word !== false);
  return words.length === 0 ? i18n.t("nowhere: its test report is by band") : words.join("; ");
}

function basisWords(i18n: I18n, { protection }: RuleSetVersion, locale: Locale): string {
  const alpha = formatNumber(protection.alpha, Number.isInteger(protection.alpha) ? 0 : 2, locale);
  return protection.allowanceDb === 0
    ? i18n.t(
        "By octave bands, mean less {alpha} × deviation. The totals beneath are by the governing method.",
        { alpha },
      )
    : i18n.t(
        "By octave bands, mean less {alpha} × deviation. The totals beneath are by the governing method and have the rule set’s {allowance} dB on them.",
        { alpha, allowance: formatLimit(protection.allowanceDb, locale) },
      );
}
