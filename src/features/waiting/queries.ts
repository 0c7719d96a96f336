import { queryOptions } from "@tanstack/react-query";
import type { WaitingView } from "../../../shared/schemas/waiting";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

const waitingReply = ownReply<WaitingView>(
  "today",
  "ruleSets",
  "crews",
  "findings",
  "toBeChecked",
  "outgoing",
  "troubled",
  "calibrationsDue",
  "stepsDue",
);

export const waitingQuery = (siteId: string | undefined) =>
  queryOptions({
    queryKey: ["waiting", siteId ?? "all"],
    queryFn: ({ signal }) =>
      api.get("/waiting", { query: { siteId }, schema: waitingReply, signal }),
    refetchInterval: 60_000,
  });
