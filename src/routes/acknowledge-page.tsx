import { useLingui } from "@lingui/react";
import { useMutation, useQuery, useQueryClient } from "@tanstack/react-query";
import { useEffect } from "react";
import { useParams } from "react-router-dom";
import { formatDate } from "../../shared/format/date";
import type { OpenedLetter } from "../../shared/schemas/letter";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import { FormProblem } from "../components/form-problem";
import { LangSwitch } from "../components/lang-switch";
import { Folio, Page, PageBody, PageHead, RunningHead } from "../components/page";
import { Problem } from "../components/problem";
import { ApiError, api } from "../lib/api";
import { readAs, rememberChoice, useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { useOneAtATime } from "../lib/one-at-a-time";
import { ownReply } from "../lib/own-reply";
import "../styles/letters.css";

const letterReply = ownReply<OpenedLetter>("state", "language", "from");

/** A letter by its link, without signing in. It is acknowledged by the button, never by opening it. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { secret = "" } = useParams();
  const client = useQueryClient();
  const path = `/acknowledgements/${encodeURIComponent(secret)}`;
  const key = ["acknowledgement", secret];
  const { begin, end } = useOneAtATime();
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const letter = useQuery({
    queryKey: key,
    queryFn: ({ signal }) => api.get(path, { schema: letterReply, signal, asksWhoIsThere: true }),
    // What is gone or somebody else's stays so.
    retry: false,
    staleTime: Number.POSITIVE_INFINITY,
  });
  const acknowledge = useMutation({
    mutationFn: () => api.post(path, { schema: letterReply }),
    onSuccess: (reply) => {
      client.setQueryData(key, reply);
      moveFocus("[data-said]");
    },
    // Used meanwhile, in another window: how it stands now is what counts.
    onError: () => void letter.refetch(),
    onSettled: end,
  });
  const { data, error } = letter;
  const language = data?.language;
  useEffect(() => {
    if (language) void readAs(i18n, language, async (chosen) => rememberChoice(chosen));
  }, [i18n, language]);
  const isSomebodyElses = error instanceof ApiError && error.code === "link-not-yours";
  const isGone = error instanceof ApiError && error.status === 404;
  return (
    <Page head={<RunningHead account={<LangSwitch />} />} folio={<Folio />}>
      <PageBody size="worker">
        <div ref={place} className="contents">
          <PageHead
            title={
              data?.state === "open" && data.subject
                ? data.subject
                : i18n.t("Letter about your work")
            }
            lead={data ? data.from : error ? undefined : <span className="loading-line" />}
          />
          {isGone ? (
            <p>
              {i18n.t(
                "This link leads to no letter. Copy the whole of it from the mail, or ask the safety officer.",
              )}
            </p>
          ) : isSomebodyElses ? (
            <p role="alert">
              <Problem error={error} />
            </p>
          ) : (
            error && <Failed error={error} onRetry={() => void letter.refetch()} />
          )}
          {data && (
            <p role="status" data-said tabIndex={-1}>
              {data.state === "acknowledged" &&
                i18n.t(
                  "You said on {date} that you have read this letter. Nothing more is to be done.",
                  {
                    date: formatDate(data.acknowledgedOn ?? "", locale),
                  },
                )}
              {data.state === "expired" &&
                i18n.t("This link has run out. Ask the safety officer for the letter on paper.")}
            </p>
          )}
          {data?.state === "open" && (
            <>
              <div className="opened-letter">{data.text}</div>
              <FormProblem error={acknowledge.error} />
              <Button
                kind="primary"
                size="worker"
                isBusy={acknowledge.isPending}
                onClick={() => begin() && acknowledge.mutate()}
              >
                {i18n.t("I have read it")}
              </Button>
            </>
          )}
        </div>
      </PageBody>
    </Page>
  );
}
