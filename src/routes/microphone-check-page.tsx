import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useNavigate, useParams, useSearchParams } from "react-router-dom";
import { localDate } from "../../shared/time/zone";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { fitQueries } from "../features/fits/queries";
import { MicrophoneCheckForm } from "../features/microphone-check/check-form";
import { ChecksTable } from "../features/microphone-check/checks-table";
import { checkQueries } from "../features/microphone-check/queries";
import { protectorQueries } from "../features/protectors/queries";
import { hasRole, useUser } from "../features/session/session";
import { taskQueries } from "../features/tasks/queries";
import { workerQueries } from "../features/workers/queries";
import { paths } from "../paths";
import "../styles/microphone-check.css";

/** Two microphones at one worker's ear: recordings are sent in, and what was sent before stands beneath. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const found = useQuery(workerQueries.one(id));
  const worker = found.data;
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("How it is done")} isRuled>
            <p>
              {i18n.t(
                "One microphone outside the cup, one inside, in loud steady noise; a minute is best. For an active protector once more with the active part on, without touching anything.",
              )}
            </p>
            <p>
              {i18n.t(
                "The recordings are analysed and deleted. What is kept are levels by octave band.",
              )}
            </p>
          </MarginNote>
        }
      >
        <PageHead
          way={worker && <TextLink to={paths.worker(worker.id)}>{worker.name}</TextLink>}
          title={i18n.t("Two-microphone check")}
          lead={i18n.t("What a protector takes off at this worker’s own ear.")}
        />
        {found.isError && <Failed error={found.error} onRetry={() => void found.refetch()} />}
        {worker && <NewCheck workerId={worker.id} />}
        {worker && <Earlier workerId={worker.id} siteId={worker.siteId} />}
      </PageBody>
      <Folio>{worker && <TextLink to={paths.worker(worker.id)}>{worker.name}</TextLink>}</Folio>
    </>
  );
}

const useTimeZone = (siteId: string) =>
  useUser().sites.find(({ id }) => id === siteId)?.timeZone ?? "UTC";

function NewCheck({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const [search] = useSearchParams();
  const user = useUser();
  const worker = useQuery(workerQueries.one(workerId)).data;
  const timeZone = useTimeZone(worker?.siteId ?? "");
  const models = useQuery(protectorQueries.list());
  const tasks = useQuery({ ...taskQueries.list(worker?.siteId), enabled: worker !== undefined });
  const desk = useQuery({ ...fitQueries.desk(workerId), enabled: hasRole(user, "officer") });
  if (!worker || !hasRole(user, "officer")) return null;
  const failed = [models, tasks].find(({ isError }) => isError);
  if (failed) return <Failed error={failed.error} onRetry={() => void failed.refetch()} />;
  // Without rules at the site there is no need, and nothing is filled in.
  if (!models.data || !tasks.data || desk.isPending)
    return <p className="loading-line">{i18n.t("Being loaded…")}</p>;
  const withBands = tasks.data.rows.filter(
    ({ isArchived, level }) => !isArchived && level?.octaveBandsDb,
  );
  const today = localDate(new Date(), timeZone);
  const worn = worker.assignments.find(
    ({ fromDate, toDate }) => fromDate <= today && (toDate === null || toDate >= today),
  );
  return (
    <Section id="new-check" title={i18n.t("A new check")}>
      <MicrophoneCheckForm
        workerId={worker.id}
        siteId={worker.siteId}
        models={models.data.rows
          .filter(({ isArchived }) => !isArchived)
          .map(({ id, name, data }) => ({
            value: id,
            label: name,
            hasActivePart: data.active !== null,
          }))}
        modelId={search.get("model") ?? worn?.innerModelId ?? null}
        ear={search.get("ear") === "right" ? "right" : "left"}
        taskId={withBands.find(({ id }) => id === desk.data?.need.taskId)?.id ?? null}
        tasks={withBands.map(({ id, name }) => ({ value: id, label: name }))}
        onSent={({ id }) => navigate(paths.microphoneResult(worker.id, id))}
      />
    </Section>
  );
}

function Earlier({ workerId, siteId }: { workerId: string; siteId: string }) {
  const { i18n } = useLingui();
  const timeZone = useTimeZone(siteId);
  const list = useInfiniteQuery(checkQueries.list(workerId));
  return (
    <Section id="checks" title={i18n.t("Sent in before")}>
      <ChecksTable
        timeZone={timeZone}
        rows={list.data?.pages.flatMap((page) => page.rows) ?? []}
        state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
        error={list.error}
        onRetry={() => void list.refetch()}
        more={{
          hasMore: list.hasNextPage,
          isLoading: list.isFetchingNextPage,
          onMore: () => void list.fetchNextPage(),
        }}
      />
    </Section>
  );
}
