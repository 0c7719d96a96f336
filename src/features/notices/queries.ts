import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import type { EntryNotices, NoticeAction, NoticeText } from "../../../shared/schemas/notice";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

const entryReply = ownReply<EntryNotices>("entryId", "state", "people", "notices");
const textReply = ownReply<z.infer<typeof NoticeText>>("subject", "text", "isSent");

/** How a notice reads: as it was sent, or as it would read now. */
export const noticeTextQuery = (id: string) =>
  queryOptions({
    queryKey: ["notices", "text", id],
    queryFn: ({ signal }) => api.get(`/notices/${id}`, { schema: textReply, signal }),
  });

/** Holds back, lets go at once, or tells in another way, what an entry tells: one notice of it, or all. */
export function useHandleNotices(
  { entryId, noticeId = null }: { entryId: string; noticeId?: string | null },
  onHandled: (action: NoticeAction) => void = () => undefined,
) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (action: NoticeAction) =>
      api.post(`/entries/${entryId}/notices/actions`, {
        body: { action, noticeId },
        schema: entryReply,
      }),
    onSuccess: (_entry, action) => onHandled(action),
    onSettled: () =>
      Promise.all([
        client.invalidateQueries({ queryKey: ["waiting"] }),
        client.invalidateQueries({ queryKey: ["notices"] }),
      ]),
  });
}
