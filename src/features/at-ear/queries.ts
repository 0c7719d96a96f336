import { keepPreviousData, queryOptions } from "@tanstack/react-query";
import { AtEarView } from "../../../shared/schemas/at-ear";
import { api } from "../../lib/api";

export interface AtEarAsked {
  readonly innerId: string;
  readonly outerId: string | undefined;
  readonly taskId: string;
  readonly workerId: string | undefined;
}

export const atEarQueries = {
  // Under the protectors' key: new data of a model are seen here as well.
  all: ["protectors", "at-ear"] as const,
  one: ({ innerId, outerId, taskId, workerId }: AtEarAsked) =>
    queryOptions({
      queryKey: [...atEarQueries.all, innerId, outerId ?? null, taskId, workerId ?? null],
      queryFn: ({ signal }) =>
        api.get(`/protectors/${innerId}/at-ear`, {
          query: { taskId, outerId, workerId },
          schema: AtEarView,
          signal,
        }),
      enabled: taskId !== "",
      placeholderData: keepPreviousData,
    }),
};
