import { useLingui } from "@lingui/react";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { RecordingAnalysis, RecordingLevels } from "../../../shared/schemas/recording";
import { type DataColumn, DataTable } from "../../components/data-table";
import { SpectrumChart } from "../../components/spectrum-chart";
import { useLocale } from "../../lib/i18n";

const difference = ({ laeqDb, lceqDb }: RecordingLevels) =>
  laeqDb === null || lceqDb === null ? null : lceqDb - laeqDb;

/** Levels of each channel, and its spectrum as a picture with the table behind it. */
export function RecordingLevelsView({ analysis }: { analysis: RecordingAnalysis }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { channels } = analysis;
  const nameOf = (index: number) =>
    channels.length === 1 ? i18n.t("Level") : i18n.t("Channel {channel}", { channel: index + 1 });
  const unitOf = ({ isAbsolute }: RecordingLevels) =>
    isAbsolute ? "dB" : i18n.t("dB re full scale");
  const rows: {
    id: string;
    label: string;

    of: (l: RecordingLevels) => number | null;
  }[] = [
    { id: "laeq", label: "LAeq", of: ({ laeqDb }) => laeqDb },
    { id: "lceq", label: "LCeq", of: ({ lceqDb }) => lceqDb },
    { id: "difference", label: "LC − LA", of: difference },
    { id: "peak", label: "LCpeak", of: ({ lcPeakDb }) => lcPeakDb },
    { id: "fast", label: "LAFmax", of: ({ lafMaxDb }) => lafMaxDb },
    { id: "slow", label: "LASmax", of: ({ lasMaxDb }) => lasMaxDb },
  ];
  const bands = [
    ...new Set(
      channels.flatMap(({ thirdOctavesDb }) => thirdOctavesDb.map((one) => one.frequencyHz)),
    ),
  ].toSorted((a, b) => a - b);
  const at = (of: RecordingLevels["octaveBandsDb"], hz: number) =>
    of.find(({ frequencyHz }) => frequencyHz === hz);
  return (
    <>
      <DataTable
        caption={i18n.t("Levels")}
        rows={rows}
        rowKey={({ id }) => id}
        columns={[
          {
            id: "what",
            head: i18n.t("Quantity"),
            isRowHead: true,
            cell: ({ label }) => label,
          },
          ...channels.map(
            (levels, index): DataColumn<(typeof rows)[number]> => ({
              id: `channel-${index + 1}`,
              head: nameOf(index),
              unit: unitOf(levels),
              kind: "figure",
              cell: (row) => formatLevel(row.of(levels), locale),
            }),
          ),
        ]}
      />
      {channels.map((levels, index) => (
        <div key={nameOf(index)} className="recording-spectrum">
          {channels.length > 1 && <h3>{nameOf(index)}</h3>}
          {levels.isSilent ? (
            <p className="not-assessed">{i18n.t("There is nothing in this channel.")}</p>
          ) : (
            <SpectrumChart
              title={i18n.t("Spectrum of {channel}; the table beneath says the same", {
                channel: nameOf(index),
              })}
              octaves={levels.octaveBandsDb}
              thirds={levels.thirdOctavesDb}
              lowDb={levels.isAbsolute ? 30 : -90}
              highDb={levels.isAbsolute ? 110 : 0}
            />
          )}
        </div>
      ))}
      <details className="recording-bands">
        <summary>{i18n.t("All bands as a table")}</summary>
        <DataTable<{ hz: number }>
          caption={i18n.t("All bands")}
          rows={bands.map((hz) => ({ hz }))}
          rowKey={({ hz }) => String(hz)}
          columns={[
            {
              id: "band",
              head: i18n.t("Band"),
              unit: "Hz",
              kind: "figure",
              isRowHead: true,
              cell: ({ hz }) => formatNumber(hz, Number.isInteger(hz) ? 0 : 1, locale),
            },
            ...channels.flatMap((levels, index): DataColumn<{ hz: number }>[] => [
              {
                id: `third-${index}`,
                head:
                  channels.length > 1
                    ? `${i18n.t("Third-octave")} ${index + 1}`
                    : i18n.t("Third-octave"),
                unit: unitOf(levels),
                kind: "figure",
                cell: ({ hz }) =>
                  formatLevel(at(levels.thirdOctavesDb, hz)?.levelDb ?? null, locale),
              },
              {
                id: `octave-${index}`,
                head: channels.length > 1 ? `${i18n.t("Octave")} ${index + 1}` : i18n.t("Octave"),
                unit: unitOf(levels),
                kind: "figure",
                cell: ({ hz }) => {
                  const octave = at(levels.octaveBandsDb, hz);
                  return octave ? formatLevel(octave.levelDb, locale) : "";
                },
              },
            ]),
          ]}
        />
      </details>
    </>
  );
}
