import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { CheckAnalysis } from "../../../shared/schemas/microphone-check";
import { BandPicture, type BandSeries } from "../../components/band-picture";
import { type DataColumn, DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";
import { activeText, reasonWord, warningText } from "./check-words";

/** What was found at one ear: the rating and its uncertainty, the active check in words, cautions, picture and table. */
export function CheckResult({
  analysis,
  children,
}: {
  analysis: CheckAnalysis;
  /** What can be done about a caution. */
  children?: ReactNode;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { parDb, methodSdDb, warnings, ear } = analysis;
  const active = activeText(i18n, analysis, locale);
  return (
    <>
      <p className="check-figure">
        {parDb === null ? (
          <span className="not-assessed">
            {ear.isRelative
              ? i18n.t("Relative analysis only: no rating comes of it.")
              : i18n.t("No rating comes of it.")}
          </span>
        ) : (
          <>
            <b className="check-par">{formatLevel(parDb, locale)} dB</b>{" "}
            {i18n.t("off the A-weighted level at this ear; standard uncertainty {sd} dB", {
              sd: formatLevel(methodSdDb, locale),
            })}
          </>
        )}
      </p>
      {active && (
        <p className="check-active">
          <b>{active.word}</b> <span>{active.sentence}</span>
        </p>
      )}
      {warnings.map((code) => (
        <p key={code} className="check-caution">
          {warningText(i18n, code, ear.isRelative)}
        </p>
      ))}
      {children}
      <Pictures analysis={analysis} />
      <BandTable analysis={analysis} />
    </>
  );
}

function Pictures({ analysis }: { analysis: CheckAnalysis }) {
  const { i18n } = useLingui();
  const { parts, ear, isAbsolute, warnings } = analysis;
  const off = parts[0]!;
  const levels: BandSeries[] = [
    {
      key: "outside",
      label: i18n.t("outside"),
      valuesDb: off.bands.map(({ outsideDb }) => outsideDb),
    },
    { key: "inside", label: i18n.t("inside"), valuesDb: off.bands.map((band) => band.insideDb) },
  ];
  const [, on] = parts;
  // Its own outside may have been louder: the inside is drawn as it would have been in the first noise.
  if (on && ear.activeDb)
    levels.push({
      key: "active",
      label: i18n.t("inside, active part on"),
      kind: "active",
      valuesDb: off.bands.map(({ insideDb }, band) => {
        const activeDb = ear.activeDb?.[band] ?? null;
        return insideDb === null || activeDb === null ? null : insideDb - activeDb;
      }),
    });
  return (
    <div className="check-pictures">
      <figure>
        <figcaption>
          {isAbsolute ? i18n.t("Levels, dB") : i18n.t("Levels, dB re full scale")}
        </figcaption>
        <BandPicture
          title={i18n.t("Levels outside and inside by octave band; the table says the same")}
          series={levels}
          lowDb={isAbsolute ? 40 : -90}
          highDb={isAbsolute ? 110 : -20}
        />
        <Legend hasActive={on !== undefined} isSwapped={warnings.includes("channels-swapped")} />
      </figure>
      <figure>
        <figcaption>{i18n.t("Taken off, dB")}</figcaption>
        <BandPicture
          title={i18n.t("Noise reduction by octave band; the table says the same")}
          isDownward
          series={[
            {
              key: "reduction",
              label: i18n.t("noise reduction"),
              valuesDb: ear.noiseReductionDb,
            },
            ...(ear.activeDb
              ? [
                  {
                    key: "active",
                    label: i18n.t("active part"),
                    kind: "active" as const,
                    valuesDb: ear.activeDb,
                  },
                ]
              : []),
          ]}
          lowDb={0}
          highDb={50}
        />
        <p className="picture-legend">
          {ear.activeDb
            ? i18n.t("Ticks: noise reduction, active part off. Rings: what the active part adds.")
            : i18n.t("Ticks: noise reduction. Hz beneath.")}
        </p>
      </figure>
    </div>
  );
}

function Legend({ hasActive, isSwapped }: { hasActive: boolean; isSwapped: boolean }) {
  const { i18n } = useLingui();
  return (
    <p className="picture-legend">
      {isSwapped
        ? i18n.t("Upper ticks: inside. Lower: outside. Hz beneath.")
        : hasActive
          ? i18n.t("Upper ticks: outside. Lower: inside. Rings: inside, active part on.")
          : i18n.t("Upper ticks: outside. Lower: inside. Hz beneath.")}
    </p>
  );
}

interface BandRow {
  readonly band: number;
  readonly hz: number;
}

function BandTable({ analysis }: { analysis: CheckAnalysis }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { parts, ear, active, isAbsolute } = analysis;
  const off = parts[0]!;
  const unit = isAbsolute ? "dB" : i18n.t("dB re full scale");
  const differs = ear.attenuationDb.some((db, band) => db !== ear.noiseReductionDb[band]);
  const figure = (
    id: string,
    head: string,
    of: (band: number) => string,
    headUnit = "dB",
  ): DataColumn<BandRow> => ({
    id,
    head,
    unit: headUnit,
    kind: "figure",
    cell: ({ band }) => of(band),
  });
  const level = (db: number | null | undefined) => formatLevel(db ?? null, locale);
  const hasReason = parts.some(({ bands }) => bands.some((band) => band.reason !== null));
  const reason: DataColumn<BandRow> = {
    id: "reason",
    head: i18n.t("Says nothing, because"),
    cell: ({ band }) =>
      [
        reasonWord(i18n, off.bands[band]?.reason ?? null),
        ...parts.slice(1).flatMap((on) =>
          on.bands[band]?.reason && off.bands[band]?.reason === null
            ? [
                i18n.t("active part on: {reason}", {
                  reason: reasonWord(i18n, on.bands[band]?.reason ?? null),
                }),
              ]
            : [],
        ),
      ].join(" "),
  };
  const columns: DataColumn<BandRow>[] = [
    {
      id: "band",
      head: i18n.t("Band"),
      unit: "Hz",
      kind: "figure",
      isRowHead: true,
      cell: ({ hz }) => hz,
    },
    figure("outside", i18n.t("Outside"), (band) => level(off.bands[band]?.outsideDb), unit),
    figure("inside", i18n.t("Inside"), (band) => level(off.bands[band]?.insideDb), unit),
    figure("reduction", i18n.t("Noise reduction"), (band) => level(ear.noiseReductionDb[band])),
    figure(
      "coherence",
      i18n.t("Coherence"),
      (band) => formatNumber(off.bands[band]?.coherence ?? null, 2, locale),
      "γ²",
    ),
    ...(differs
      ? [figure("attenuation", i18n.t("Corrected"), (band) => level(ear.attenuationDb[band]))]
      : []),
    ...(ear.activeDb
      ? [
          figure("active", i18n.t("Active part"), (band) =>
            formatLevelChange(ear.activeDb?.[band] ?? null, locale),
          ),
        ]
      : []),
    ...(active
      ? [
          figure("shortfall", i18n.t("Behind the model"), (band) =>
            formatLevelChange(active.shortfallDb[band] ?? null, locale),
          ),
        ]
      : []),
    ...(hasReason ? [reason] : []),
  ];
  return (
    <DataTable<BandRow>
      caption={i18n.t("By octave band")}
      rows={OCTAVE_BANDS_HZ.map((hz, band) => ({ hz, band }))}
      rowKey={({ hz }) => String(hz)}
      columns={columns}
    />
  );
}
