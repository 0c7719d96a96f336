import { useLingui } from "@lingui/react";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatLevel } from "../../../shared/format/level";
import type { ProtectorFacts } from "../../../shared/schemas/evaluation";
import { BandPicture } from "../../components/band-picture";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";

interface Band {
  hz: number;
  meanDb: number | null;
  sdDb: number | null;
}

/** Attenuation of cup or plug by octave band: means with their deviations, and the table behind the picture. */
export function AttenuationByBand({ bands }: { bands: ProtectorFacts["bands"] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (!bands)
    return (
      <Empty title={i18n.t("No attenuation by octave band is stated.")}>
        {i18n.t("Single numbers of the label are used instead.")}
      </Empty>
    );
  const rows: Band[] = OCTAVE_BANDS_HZ.map((hz, band) => ({
    hz,
    meanDb: bands.meanDb[band] ?? null,
    sdDb: bands.sdDb[band] ?? null,
  }));
  return (
    <div className="picture-and-table">
      <div>
        <BandPicture
          title={i18n.t(
            "Attenuation by octave band, dB, 0 at the top; the table beside it says the same",
          )}
          lowDb={0}
          highDb={50}
          isDownward
          series={[
            { key: "mean", label: i18n.t("Mean"), valuesDb: bands.meanDb, deviationDb: bands.sdDb },
          ]}
        />
        <p className="picture-legend">
          {i18n.t(
            "Tick: mean of the test subjects, dB. Whisker: one standard deviation either way. Hz beneath.",
          )}
        </p>
      </div>
      <DataTable
        caption={i18n.t("Attenuation by octave band")}
        rows={rows}
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
            id: "mean",
            head: i18n.t("Mean"),
            unit: "dB",
            kind: "figure",
            cell: ({ meanDb }) => formatLevel(meanDb, locale),
          },
          {
            id: "sd",
            head: i18n.t("Deviation"),
            unit: "dB",
            kind: "figure",
            cell: ({ sdDb }) => formatLevel(sdDb, locale),
          },
          {
            id: "assumed",
            head: i18n.t("Mean less deviation"),
            unit: "dB",
            kind: "figure",
            cell: ({ meanDb, sdDb }) =>
              formatLevel(meanDb === null || sdDb === null ? null : meanDb - sdDb, locale),
          },
        ]}
      />
    </div>
  );
}
