import { useLingui } from "@lingui/react";
import { queryOptions, useQuery } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import type { WorkerTraining } from "../../../shared/schemas/training";
import { Failed } from "../../components/failed";
import { api } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { ownReply } from "../../lib/own-reply";

/** Beneath the key of all trainings, by hand: a worker's first page does without the schemas' library. */
const trainingsOf = (workerId: string) =>
  queryOptions({
    queryKey: ["training", "worker", workerId],
    queryFn: ({ signal }) =>
      api.get(`/workers/${workerId}/training`, {
        schema: ownReply<WorkerTraining>("rows", "due"),
        signal,
      }),
  });

/** A worker's trainings and when the next is due, to the office and to the worker. */
export function WorkerTrainings({ workerId, today }: { workerId: string; today: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data, error, refetch } = useQuery(trainingsOf(workerId));
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  if (!data)
    return (
      <p>
        <span className="loading-line" />
      </p>
    );
  const { rows, due } = data;
  return (
    <>
      <p>
        {due === null ? (
          i18n.t("No training is due.")
        ) : due.dueOn < today ? (
          <b>
            {i18n.t("Training has been due since {date}.", { date: formatDate(due.dueOn, locale) })}
          </b>
        ) : (
          i18n.t("The next training is due by {date}.", { date: formatDate(due.dueOn, locale) })
        )}
      </p>
      {rows.length > 0 && (
        <ul className="own-trainings">
          {rows.map(({ id, heldOn, title, durationMin, fileId }) => (
            <li key={id}>
              {formatDate(heldOn, locale)}: {title}, {formatDuration(durationMin, locale)}
              {fileId !== null && (
                <>
                  {", "}
                  <a className="link" href={`/api/files/${fileId}`} download>
                    {i18n.t("what was shown")}
                    <span className="sr-only">{`: ${title}`}</span>
                  </a>
                </>
              )}
            </li>
          ))}
        </ul>
      )}
    </>
  );
}
