import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatDay, formatInstant } from "../../shared/format/date";
import { startsSentence } from "../../shared/format/words";
import type { HandOverView } from "../../shared/schemas/hand-over";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FormProblem } from "../components/form-problem";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { HandOverLists } from "../features/crew-sheet/hand-over-content";
import { HandOverForm } from "../features/crew-sheet/hand-over-form";
import { handOverQueries, useReceiveHandOver } from "../features/crew-sheet/hand-over-queries";
import { SheetLoading } from "../features/crew-sheet/sheet-part";
import { hasRole, useUser } from "../features/session/session";
import { ApiError } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { paths } from "../paths";
import "../styles/crew-sheet.css";

/** From one shift to the next: what waits to be read, what there is to hand over, and what was handed over before. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const { crewId = "" } = useParams();
  const mayGive = hasRole(user, "supervisor", "officer");
  const draft = useQuery({ ...handOverQueries.draft(crewId), enabled: mayGive });
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const given = useInfiniteQuery(handOverQueries.list(crewId));
  const rows = given.data?.pages.flatMap((page) => page.rows) ?? [];
  const timeZone = draft.data?.crew.timeZone ?? user.sites[0]?.timeZone ?? "UTC";
  const waiting = rows.filter(({ canReceive }) => canReceive);
  const earlier = rows.filter(({ canReceive }) => !canReceive);
  // Whoever has the crew from tomorrow on reads what was given to them, and gives nothing yet.
  const isNotInCharge = draft.error instanceof ApiError && draft.error.status === 404;
  return (
    <>
      <PageBody>
        <div className="crew-people" ref={place}>
          <PageHead
            way={<TextLink to={paths.crewSheetOf(crewId)}>{i18n.t("Crew sheet")}</TextLink>}
            title={
              draft.data
                ? i18n.t("Hand-over, {crew}", { crew: draft.data.crew.name })
                : i18n.t("Hand-over")
            }
            lead={
              draft.data &&
              i18n.t("{day}, from the sheet.", {
                day: startsSentence(formatDay(draft.data.content.sheetDate, locale), locale),
              })
            }
          />
          {waiting.map((one) => (
            <Waiting
              key={one.id}
              crewId={crewId}
              handOver={one}
              timeZone={timeZone}
              onRead={() => moveFocus("summary")}
            />
          ))}
          {mayGive && !isNotInCharge && (
            <Section title={i18n.t("To hand over")} id="draft">
              {draft.isPending && <SheetLoading />}
              {draft.isError && <Failed error={draft.error} onRetry={() => void draft.refetch()} />}
              {draft.data && (
                <>
                  <HandOverLists content={draft.data.content} timeZone={timeZone} />
                  <HandOverForm draft={draft.data} />
                </>
              )}
            </Section>
          )}
          <Section title={i18n.t("Earlier")} id="earlier">
            {given.isPending && <SheetLoading />}
            {given.isError && <Failed error={given.error} onRetry={() => void given.refetch()} />}
            {given.isSuccess && earlier.length === 0 && (
              <Empty title={i18n.t("Nothing was handed over before.")} />
            )}
            {earlier.map((one) => (
              <Earlier key={one.id} handOver={one} timeZone={timeZone} />
            ))}
            {given.hasNextPage && (
              <TextButton
                className="sheet-more"
                onClick={() => void given.fetchNextPage()}
                disabled={given.isFetchingNextPage}
              >
                {i18n.t("and more")}
              </TextButton>
            )}
          </Section>
        </div>
      </PageBody>
      <Folio />
    </>
  );
}

function Given({ handOver, timeZone }: { handOver: HandOverView; timeZone: string }) {
  return (
    <>
      {handOver.note && <p className="hand-over-note">{handOver.note}</p>}
      <HandOverLists content={handOver.content} timeZone={timeZone} />
    </>
  );
}

/** Given to whoever reads this, and to be acknowledged. */
function Waiting({
  crewId,
  handOver,
  timeZone,
  onRead,
}: {
  crewId: string;
  handOver: HandOverView;
  timeZone: string;
  onRead: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const receive = useReceiveHandOver(crewId, handOver.id, onRead);
  return (
    <Section title={i18n.t("Handed to you by {name}", { name: handOver.byName })} id={handOver.id}>
      <p className="sheet-noticed">{formatInstant(handOver.givenAt, timeZone, locale)}</p>
      <Given handOver={handOver} timeZone={timeZone} />
      <FormProblem error={receive.error} />
      <Button kind="primary" size="supervisor" isBusy={receive.isPending} onClick={receive.start}>
        {i18n.t("I have read the hand-over")}
      </Button>
    </Section>
  );
}

function Earlier({ handOver, timeZone }: { handOver: HandOverView; timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { byName, toName, givenAt, receivedAt } = handOver;
  return (
    <details className="hand-over-earlier">
      <summary>
        {formatInstant(givenAt, timeZone, locale)}
        <span className="beneath block">
          {i18n.t("{from} to {to}", { from: byName, to: toName })},{" "}
          {receivedAt
            ? i18n.t("read {time}", { time: formatInstant(receivedAt, timeZone, locale) })
            : i18n.t("not read yet")}
        </span>
      </summary>
      <Given handOver={handOver} timeZone={timeZone} />
    </details>
  );
}
