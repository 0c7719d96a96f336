import { queryOptions } from "@tanstack/react-query";
import {
  type RecordReceiptInput,
  type RecordTransferInput,
  RecordTransferList,
  RecordTransferView,
} from "../../../shared/schemas/record-transfer";
import { api, apiAddress, newChangeKey } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { retentionQueries, useRetentionChange } from "./retention-queries";

/** While a file may be on its way, whether it has gone out whole is asked so often, ms. */
const ASKED_EVERY_MS = 5000;

export const transferQueries = {
  list: queryOptions({
    queryKey: [...retentionQueries.all, "transfers"],
    queryFn: ({ signal }) => api.get("/record-transfers", { schema: RecordTransferList, signal }),
    refetchInterval: ({ state }) =>
      state.data?.rows.some((one) => one.state === "approved") ? ASKED_EVERY_MS : false,
  }),
};

export const transferFileAddress = ({ id }: Pick<RecordTransferView, "id">) =>
  apiAddress(`/record-transfers/${id}/records.zip`);

export function useProposeTransfer(onDone: () => void) {
  const changeKey = useChangeKey();
  return useRetentionChange(
    (body: RecordTransferInput) =>
      api.post("/record-transfers", {
        body,
        schema: RecordTransferView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    () => {
      changeKey.forget();
      onDone();
    },
  );
}

type Seen = Pick<RecordTransferView, "id" | "revision">;

export function useReceiveTransfer({ id, revision }: Seen, onDone: () => void) {
  return useRetentionChange(
    (body: RecordReceiptInput) =>
      api.post(`/record-transfers/${id}/receipt`, {
        body,
        ifMatch: String(revision),
        schema: RecordTransferView,
        idempotencyKey: newChangeKey(),
      }),
    onDone,
  );
}
