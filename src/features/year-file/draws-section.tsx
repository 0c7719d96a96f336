import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useNavigate } from "react-router-dom";
import { formatInstant } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import { DrawInput, type DrawRow } from "../../../shared/schemas/draw";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import {
  Form,
  FormActions,
  NumberField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextLink } from "../../components/link";
import { Section } from "../../components/page";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { drawQueries, useDrawRecords } from "./draw-queries";
import { drawState } from "./draw-words";
import type { YearOfSite } from "./queries";

const USUAL_SIZE = 10;
const SEED_DIGITS = 8;

/** Digits that nobody chose. */
const newSeed = (): string =>
  [...crypto.getRandomValues(new Uint32Array(SEED_DIGITS))].map((one) => one % 10).join("");

function DrawForm({ year }: { year: YearOfSite }) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const draw = useDrawRecords();
  const form = useSchemaForm(DrawInput, {
    defaultValues: { ...year, seed: newSeed(), size: USUAL_SIZE },
  });
  return (
    <Form
      aria-label={i18n.t("Draw records at random")}
      className="draw-form"
      onSubmit={form.handleSubmit((body) => {
        if (!draw.begin()) return;
        draw.mutate(body, {
          onSuccess: ({ id }) => navigate(paths.draw(id)),
          onError: showIssuesOn(form, i18n),
        });
      })}
    >
      <NumberField form={form} name="size" label={i18n.t("Records")} />
      <TextField
        form={form}
        name="seed"
        label={i18n.t("Seed")}
        note={i18n.t("Digits nobody chose; or type your own, such as what a die showed.")}
        inputProps={{ autoComplete: "off" }}
      />
      <FormProblem error={draw.error} />
      <FormActions>
        <SubmitButton isBusy={draw.isPending}>{i18n.t("Draw records at random")}</SubmitButton>
      </FormActions>
    </Form>
  );
}

/** Records drawn at random from a year: those kept, and for an auditor a new draw. */
export function DrawsSection({
  year,
  mayDraw,
  timeZone,
}: {
  year: YearOfSite;
  mayDraw: boolean;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const draws = useInfiniteQuery(drawQueries.list(year));
  const rows = draws.data?.pages.flatMap((page) => page.rows) ?? [];
  const columns: DataColumn<DrawRow>[] = [
    {
      id: "when",
      head: i18n.t("Drawn"),
      unit: timeZone,
      isRowHead: true,
      cell: ({ id, drawnAt }) => (
        <TextLink to={paths.draw(id)}>{formatInstant(drawnAt, timeZone, locale)}</TextLink>
      ),
    },
    { id: "by", head: i18n.t("By"), cell: ({ authorName }) => <bdi>{authorName}</bdi> },
    {
      id: "records",
      head: i18n.t("Records"),
      kind: "figure",
      cell: ({ records, drawnFrom }) =>
        i18n.t("{records} of {drawnFrom}", {
          records: formatNumber(records, 0, locale),
          drawnFrom: formatNumber(drawnFrom, 0, locale),
        }),
    },
    { id: "state", head: i18n.t("Marks"), cell: (draw) => drawState(i18n, draw) },
    {
      id: "signed",
      head: i18n.t("Signed off"),
      cell: ({ signed }) =>
        signed ? formatInstant(signed.at, timeZone, locale) : i18n.t("not yet"),
    },
  ];
  if (!mayDraw && draws.isSuccess && rows.length === 0) return null;
  return (
    <Section id="draws" title={i18n.t("Records drawn at random")}>
      {mayDraw && <DrawForm key={`${year.siteId} ${year.year}`} year={year} />}
      <DataTable
        caption={i18n.t("Records drawn at random")}
        columns={columns}
        rows={rows}
        rowKey={({ id }) => id}
        stacksOnPhone
        state={draws.isSuccess ? "ready" : draws.isError ? "failed" : "loading"}
        error={draws.error}
        onRetry={() => void draws.refetch()}
        more={{
          hasMore: draws.hasNextPage,
          isLoading: draws.isFetchingNextPage,
          onMore: () => void draws.fetchNextPage(),
        }}
        empty={<Empty title={i18n.t("Nothing was drawn from this year yet.")} />}
      />
    </Section>
  );
}
