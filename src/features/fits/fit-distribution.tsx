import { useLingui } from "@lingui/react";
import type { z } from "zod";
import { formatLevel } from "../../../shared/format/level";
import type { FitDistribution as Distribution } from "../../../shared/schemas/fit";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { FitScale, FitScaleHead } from "./fit-scale";
import { labelWord } from "./fit-words";

type Row = z.infer<typeof Distribution>["rows"][number];

/** How far a group may stay under its label before somebody is sent to look, dB. Common practice, no source. */
const UNDER_LABEL_DB = 5;
const LEAST_FOR_A_WORD = 6;

/** A model whose wearers get much less than its label says: a bad model, a wrong size, or nobody was shown how. */
const isUnderLabel = ({ count, meanDb, labelDb }: Row) =>
  labelDb !== null && count >= LEAST_FOR_A_WORD && meanDb < labelDb - UNDER_LABEL_DB;

/** A site's own fits by model against the label: each a tick, the label the upright, the mean a caret. */
export function FitDistribution({
  rows,
  ...state
}: { rows: readonly Row[] } & Pick<DataTableProps<Row>, "state" | "error" | "onRetry">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<Row>[] = [
    {
      id: "model",
      head: i18n.t("Protector"),
      isRowHead: true,
      sortValue: ({ modelName }) => modelName,
      cell: ({ modelId, modelName }) => (
        <TextLink className="is-quiet is-name" to={paths.protector(modelId)}>
          {modelName}
        </TextLink>
      ),
    },
    {
      id: "picture",
      head: <FitScaleHead />,
      widthPx: 300,
      cell: ({ parsDb, labelDb, meanDb }) => (
        <FitScale ticksDb={parsDb} uprightDb={labelDb} meanDb={meanDb} />
      ),
    },
    {
      id: "mean",
      head: i18n.t("Mean"),
      unit: "dB",
      kind: "figure",
      sortValue: ({ meanDb }) => meanDb,
      cell: ({ meanDb }) => formatLevel(meanDb, locale),
    },
    {
      id: "sd",
      head: i18n.t("Standard deviation"),
      unit: "dB",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ sdDb }) => formatLevel(sdDb, locale),
    },
    {
      id: "label",
      head: i18n.t("Label"),
      unit: "dB",
      cell: ({ labelDb, labelMethod }) => (
        <span className="two-lines">
          <span className="mono">{formatLevel(labelDb, locale)}</span>
          <span className="beneath">{labelWord(i18n, labelMethod)}</span>
        </span>
      ),
    },
    {
      id: "count",
      head: i18n.t("Tested"),
      unit: i18n.t("people"),
      kind: "figure",
      sortValue: ({ count }) => count,
      cell: ({ count }) => count,
    },
    {
      id: "failed",
      head: i18n.t("Do not fit"),
      kind: "figure",
      sortValue: ({ failedCount }) => failedCount,
      cell: ({ failedCount }) => (
        <span className={failedCount === 0 ? "is-zero" : undefined}>{failedCount}</span>
      ),
    },
    {
      id: "word",
      head: i18n.t("What it says"),
      cell: (row) =>
        isUnderLabel(row) ? (
          <b>{i18n.t("Much less than its label: look at the model and how it is put in")}</b>
        ) : row.count < LEAST_FOR_A_WORD ? (
          <span className="not-assessed">{i18n.t("too few to tell")}</span>
        ) : (
          i18n.t("in keeping with its label")
        ),
    },
  ];
  return (
    <DataTable<Row>
      {...state}
      caption={i18n.t("Own fits by protector, against the label")}
      rows={rows}
      rowKey={({ modelId }) => modelId}
      isTwoLine
      stacksOnPhone
      columns={columns}
      empty={
        <Empty title={i18n.t("No fit is on record here yet.")}>
          <TextLink to={paths.fitting}>{i18n.t("Test one")}</TextLink>
        </Empty>
      }
    />
  );
}
