import { useLingui } from "@lingui/react";
import type { z } from "zod";
import { OCTAVE_BANDS_HZ, US_LABEL_HZ } from "../../../shared/acoustics/types";
import { formatLevel } from "../../../shared/format/level";
import type { RegisterData } from "../../../shared/schemas/protector";
import { bandLabel } from "../../components/band-picture";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { hasTestData, labelRatings } from "./label-ratings";
import { RatingsTable } from "./ratings-table";
import { typedFacts } from "./typed-facts";

type Data = z.infer<typeof RegisterData>;

/** The label beside what its test data give; and the test data of the US label and of single subjects, where stated. */
export function LabelAndTestData({ data }: { data: Data }) {
  const { i18n } = useLingui();
  const ratings = labelRatings(typedFacts(data));
  return (
    <>
      {ratings.some(hasTestData) ? (
        <RatingsTable ratings={ratings} auClass={data.auClass} />
      ) : (
        <Empty title={i18n.t("The label can’t be recomputed.")}>
          {i18n.t("That takes test data by octave band, or by third-octave for the US number.")}
        </Empty>
      )}
      {data.usLabel && <UsTestData usLabel={data.usLabel} />}
      {data.subjectsDb && <Subjects subjectsDb={data.subjectsDb} />}
    </>
  );
}

function UsTestData({ usLabel }: { usLabel: NonNullable<Data["usLabel"]> }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <div className="narrow-table">
      <h3>{i18n.t("US test data by third-octave")}</h3>
      <DataTable
        caption={i18n.t("US test data by third-octave")}
        rows={US_LABEL_HZ.map((hz, index) => ({
          hz,
          meanDb: usLabel.meanDb[index] ?? null,
          sdDb: usLabel.sdDb[index] ?? null,
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
        ]}
      />
    </div>
  );
}

function Subjects({ subjectsDb }: { subjectsDb: NonNullable<Data["subjectsDb"]> }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <details className="subjects-table">
      <summary>{i18n.t("{count} single test subjects", { count: subjectsDb.length })}</summary>
      <DataTable
        caption={i18n.t("Attenuation of single test subjects, dB")}
        rows={subjectsDb.map((bands, index) => ({ number: index + 1, bands }))}
        rowKey={({ number }) => String(number)}
        columns={[
          {
            id: "subject",
            head: i18n.t("Subject"),
            isRowHead: true,
            cell: ({ number }) => number,
          },
          ...OCTAVE_BANDS_HZ.map((hz, band) => ({
            id: String(hz),
            head: bandLabel(hz),
            kind: "figure" as const,
            cell: ({ bands }: { bands: (typeof subjectsDb)[number] }) =>
              formatLevel(bands[band] ?? null, locale),
          })),
        ]}
      />
    </details>
  );
}
