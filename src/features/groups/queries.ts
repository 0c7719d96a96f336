import { queryOptions } from "@tanstack/react-query";
import { GroupView } from "../../../shared/schemas/group";
import { api } from "../../lib/api";

export const groupQueries = {
  all: ["groups"] as const,
  one: (jobId: string, surveyId?: string) =>
    queryOptions({
      queryKey: [...groupQueries.all, jobId, surveyId ?? null],
      queryFn: ({ signal }) =>
        api.get(`/groups/${jobId}`, { query: { surveyId }, schema: GroupView, signal }),
    }),
};
