import { useLingui } from "@lingui/react";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../../../shared/acoustics/types";
import { formatLevel } from "../../../shared/format/level";
import { BandPicture } from "../../components/band-picture";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";

/** The spectrum of a task's noise as a line, and the table behind it. */
export function Spectrum({ octaveBandsDb }: { octaveBandsDb: OctaveBandValues }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <div className="picture-and-table">
      <div>
        <BandPicture
          title={i18n.t("Octave band levels, dB; the table beside it says the same")}
          lowDb={50}
          highDb={120}
          series={[{ key: "spectrum", label: i18n.t("Level"), valuesDb: octaveBandsDb }]}
        />
        <p className="picture-legend">
          {i18n.t("Unweighted level by octave band, dB. Hz beneath.")}
        </p>
      </div>
      <DataTable
        caption={i18n.t("Octave band levels")}
        rows={OCTAVE_BANDS_HZ.map((hz, band) => ({ hz, levelDb: octaveBandsDb[band] ?? null }))}
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
            id: "level",
            head: i18n.t("Level"),
            unit: "dB",
            kind: "figure",
            cell: ({ levelDb }) => formatLevel(levelDb, locale),
          },
        ]}
      />
    </div>
  );
}
