import { useMutation, useQueryClient } from "@tanstack/react-query";
import { type YearReportInput, YearReportRow } from "../../../shared/schemas/report";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { type YearOfSite, yearFileQueries } from "./queries";

/** Issues a report of a year, once however often it is pressed. */
export function useIssueReport(year: YearOfSite) {
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const issue = useMutation({
    mutationFn: (body: YearReportInput) =>
      api.post("/year-reports", {
        body,
        schema: YearReportRow,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: async () => {
      changeKey.forget();
      await client.invalidateQueries({ queryKey: yearFileQueries.reports(year).queryKey });
    },
    onSettled: end,
  });
  return { ...issue, begin };
}
