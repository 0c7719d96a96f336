import { useLingui } from "@lingui/react";
import { queryOptions, useMutation, useQuery, useQueryClient } from "@tanstack/react-query";
import { formatInstant } from "../../../shared/format/date";
import { CalendarFeedMade, CalendarFeedView } from "../../../shared/schemas/duty";
import { Button } from "../../components/button";
import { Failed } from "../../components/failed";
import { FormProblem } from "../../components/form-problem";
import { api, newChangeKey } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";

const feedQuery = queryOptions({
  queryKey: ["calendar-feed"],
  queryFn: ({ signal }) => api.get("/me/calendar", { schema: CalendarFeedView, signal }),
});

/** A private address for a calendar program; shown once, as it is made, and ended at any time. */
export function CalendarFeed({ timeZone }: { timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const { data, error, refetch } = useQuery(feedQuery);
  const take = ({ madeAt }: { madeAt: string | null }) =>
    client.setQueryData(feedQuery.queryKey, { madeAt });
  const make = useMutation({
    mutationFn: () =>
      api.post("/me/calendar", {
        body: {},
        schema: CalendarFeedMade,
        idempotencyKey: newChangeKey(),
      }),
    onSuccess: take,
    onSettled: end,
  });
  const stop = useMutation({
    mutationFn: () =>
      api.post("/me/calendar/end", {
        body: {},
        schema: CalendarFeedView,
        idempotencyKey: newChangeKey(),
      }),
    onSuccess: (feed) => {
      take(feed);
      make.reset();
    },
    onSettled: end,
  });
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  const madeAt = data?.madeAt ?? null;
  return (
    <>
      <p>
        {madeAt === null
          ? i18n.t("A calendar program can read what is due to you under an address of your own.")
          : i18n.t("Your address was made on {when}. Whoever has it reads what you may read.", {
              when: formatInstant(madeAt, timeZone, locale),
            })}
      </p>
      {make.data && (
        <label className="feed-address">
          {i18n.t("Your address, shown this once")}
          <input
            className="input mono"
            readOnly
            value={make.data.address}
            onFocus={(event) => event.target.select()}
          />
        </label>
      )}
      <FormProblem error={make.error ?? stop.error} />
      <p className="feed-actions">
        <Button
          isBusy={make.isPending}
          onClick={() => {
            if (begin()) make.mutate();
          }}
        >
          {madeAt === null ? i18n.t("Make an address") : i18n.t("Make another in its place")}
        </Button>
        {madeAt !== null && (
          <Button
            isBusy={stop.isPending}
            onClick={() => {
              if (begin()) stop.mutate();
            }}
          >
            {i18n.t("End it")}
          </Button>
        )}
      </p>
    </>
  );
}
