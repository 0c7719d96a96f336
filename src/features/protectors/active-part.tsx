import { useLingui } from "@lingui/react";
import { activeAttenuationDb, breakEvenHz } from "../../../shared/acoustics/protection/active";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel, formatLevelWithUnit } from "../../../shared/format/level";
import { editNumber, fieldNumber, formatNumber, NO_FIGURE } from "../../../shared/format/number";
import type { ProtectorFacts } from "../../../shared/schemas/evaluation";
import { BandPicture } from "../../components/band-picture";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";

/** The electronic part, apart from cup or plug: what it credits by band, and where that ends. */
export function ActivePart({ active }: { active: NonNullable<ProtectorFacts["active"]> }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const credited = activeAttenuationDb(active);
  const { delayS, gain } = active;
  const endsHz = delayS !== null && gain !== null ? breakEvenHz(delayS, gain) : null;
  const facts = [
    {
      key: "source",
      label: i18n.t("Comes from"),
      value:
        active.attenuationDb !== null
          ? i18n.t("its test report, by octave band")
          : delayS !== null && gain !== null
            ? i18n.t("delay {delay} µs and gain {gain}", {
                delay: fieldNumber(delayS * 1e6, locale),
                gain: editNumber(gain, locale),
              })
            : null,
    },
    // Of a test report the bands below say where it does.
    ...(endsHz === null
      ? []
      : [
          {
            key: "break-even",
            label: i18n.t("Adds noise from"),
            value: `${formatNumber(endsHz, 0, locale)} Hz`,
          },
        ]),
    {
      key: "maximum",
      label: i18n.t("At most"),
      value: active.maximumDb === null ? null : formatLevelWithUnit(active.maximumDb, locale),
    },
    {
      key: "bandwidth",
      label: i18n.t("Works up to"),
      value:
        active.bandwidthHz === null ? null : `${formatNumber(active.bandwidthHz, 0, locale)} Hz`,
    },
    {
      key: "saturates",
      label: i18n.t("Saturates above"),
      value:
        active.saturatesAboveDb === null
          ? null
          : i18n.t("{level} dB(A) outside", {
              level: formatLevel(active.saturatesAboveDb, locale),
            }),
    },
    {
      key: "battery",
      label: i18n.t("Battery lasts"),
      value: active.batteryMin === null ? null : formatDuration(active.batteryMin, locale),
    },
  ];
  return (
    <>
      <p className="review-lead">
        {i18n.t(
          "Stored apart from cup or plug. A limit is judged with the active part off, unless the site says otherwise and a passed check of the worker is on record.",
        )}
      </p>
      {credited && (
        <div className="picture-and-table">
          <div>
            <BandPicture
              title={i18n.t(
                "Active attenuation by octave band, dB, 0 in ink; above it the part adds noise. The table beside it says the same",
              )}
              lowDb={-10}
              highDb={30}
              isDownward
              heightPx={180}
              series={[
                { key: "active", label: i18n.t("Active part"), valuesDb: credited, kind: "active" },
              ]}
            />
            <p className="picture-legend">
              {i18n.t(
                "Ring: what the active part takes away further, dB; above the ink line it adds noise.",
              )}
            </p>
          </div>
          <DataTable
            caption={i18n.t("Active attenuation by octave band")}
            rows={OCTAVE_BANDS_HZ.map((hz, band) => ({
              hz,
              statedDb: active.attenuationDb?.[band] ?? null,
              creditedDb: credited[band] ?? null,
            }))}
            rowKey={({ hz }) => String(hz)}
            columns={[
              {
                id: "band",
                head: i18n.t("Band"),
                unit: "Hz",
                kind: "figure",
                isRowHead: true,
                cell: ({ hz }) => hz,
              },
              {
                id: "stated",
                head: i18n.t("Stated"),
                unit: "dB",
                kind: "figure",
                cell: ({ statedDb }) => formatLevel(statedDb, locale),
              },
              {
                id: "credited",
                head: i18n.t("Credited"),
                unit: "dB",
                kind: "figure",
                cell: ({ creditedDb }) => formatLevel(creditedDb, locale),
              },
            ]}
          />
        </div>
      )}
      <dl className="facts">
        {facts.map(({ key, label, value }) => (
          <div key={key}>
            <dt>{label}</dt>
            <dd className={value === null ? "not-assessed" : undefined}>
              {value ?? (key === "break-even" ? NO_FIGURE : i18n.t("not stated"))}
            </dd>
          </div>
        ))}
      </dl>
    </>
  );
}
