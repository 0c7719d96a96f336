import { infiniteQueryOptions, queryOptions } from "@tanstack/react-query";
import { MailChoiceView, SentPage } from "../../../shared/schemas/mail-choice";
import { api } from "../../lib/api";

const SENT_AT_ONCE = 10;

export const mailQueries = {
  choices: queryOptions({
    queryKey: ["mails"],
    queryFn: ({ signal }) => api.get("/me/mails", { schema: MailChoiceView, signal }),
  }),
  sent: infiniteQueryOptions({
    queryKey: ["mails", "sent"],
    queryFn: ({ signal, pageParam }) =>
      api.get("/me/sent", {
        query: { limit: SENT_AT_ONCE, cursor: pageParam ?? undefined },
        schema: SentPage,
        signal,
      }),
    initialPageParam: null as string | null,
    getNextPageParam: ({ next }) => next,
  }),
};
