import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import { isolate } from "../../shared/i18n/isolate";
import type { DrawView } from "../../shared/schemas/draw";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { drawQueries, useSignDraw } from "../features/year-file/draw-queries";
import { drawState } from "../features/year-file/draw-words";
import { DrawnRecordLine } from "../features/year-file/drawn-record";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/year-file.css";

/** Records drawn at random from a year, each with its whole line, marked and signed off. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(drawQueries.one(id));
  if (!data)
    return (
      <PageBody>
        <PageHead
          way={<TextLink to={paths.yearFile}>{i18n.t("Year file")}</TextLink>}
          title={i18n.t("Records drawn at random")}
        />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("How they were drawn")}>
              <p>
                {i18n.t(
                  "Each day result in force got the SHA-256 of the seed, a space and its id. The first {records} in the order of these were taken, so that the same seed draws the same again.",
                  { records: data.records },
                )}
              </p>
              <p>
                {i18n.t("Seed {seed}, from {count} results.", {
                  seed: isolate(data.seed),
                  count: formatNumber(data.drawnFrom, 0, locale),
                })}
              </p>
              <p>
                {i18n.t(
                  "SHA-256 of the ids of all {count} results that were drawn from, in order, one a line:",
                  { count: formatNumber(data.drawnFrom, 0, locale) },
                )}{" "}
                <span className="mono draw-hash">{data.drawnFromSha256}</span>
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("In the trail")}>
              <p>
                {i18n.t("The draw, every mark and the signature are events with name and time.")}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={
            <TextLink to={`${paths.yearFile}?site=${data.siteId}&year=${data.year}`}>
              {i18n.t("Year file")}
            </TextLink>
          }
          title={i18n.t("Records drawn at random")}
          lead={i18n.t("{site}, {year}. Drawn by {name}, {at}: {state}.", {
            site: isolate(data.siteName),
            year: String(data.year),
            name: isolate(data.authorName),
            at: formatInstant(data.drawnAt, data.timeZone, locale),
            state: drawState(i18n, data),
          })}
        />
        {data.rows.map((record) => (
          <DrawnRecordLine key={record.position} draw={data} record={record} />
        ))}
        <SignOff draw={data} onStale={() => void refetch()} />
      </PageBody>
      <Folio />
    </>
  );
}

function SignOff({ draw, onStale }: { draw: DrawView; onStale: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const sign = useSignDraw(draw);
  const left = draw.records - draw.marked;
  return (
    <Section id="sign-off" title={i18n.t("Sign off")}>
      <p role="status">
        {draw.signed
          ? i18n.t("Signed off by {name}, {at}: {state}.", {
              name: isolate(draw.signed.by),
              at: formatInstant(draw.signed.at, draw.timeZone, locale),
              state: drawState(i18n, draw),
            })
          : left > 0
            ? i18n.t(
                "{left, plural, one {# record is not marked yet; then it can be signed off.} other {# records are not marked yet; then they can be signed off.}}",
                { left },
              )
            : i18n.t("Every record is marked. Nothing here changes after the signature.")}
      </p>
      {draw.can.mark && !draw.signed && left === 0 && (
        <Button
          kind="primary"
          isBusy={sign.isPending}
          onClick={() => {
            if (sign.begin()) sign.mutate({ revision: draw.revision }, { onError: onStale });
          }}
        >
          {i18n.t("Sign off with {state}", { state: drawState(i18n, draw) })}
        </Button>
      )}
      <FormProblem error={sign.error} />
      {draw.signed && (
        <p>
          <TextLink to={`${paths.yearFile}?site=${draw.siteId}&year=${draw.year}`}>
            {i18n.t("Take the year’s file")}
          </TextLink>
        </p>
      )}
    </Section>
  );
}
