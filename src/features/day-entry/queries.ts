import { queryOptions } from "@tanstack/react-query";
import { CrewList } from "../../../shared/schemas/crew";
import { EntryNotices, NoticeText } from "../../../shared/schemas/notice";
import { DayGridView, type DayRowInput, DaySaveView } from "../../../shared/schemas/shift";
import { CrewDays, WaitingView } from "../../../shared/schemas/waiting";
import { api } from "../../lib/api";

export const fetchDay = (
  crewId: string,
  date: string,
  signal?: AbortSignal,
): Promise<DayGridView> =>
  api.get(`/crews/${crewId}/day`, { query: { date }, schema: DayGridView, signal });

export const dayEntryQueries = {
  all: ["day-entry"] as const,
  grid: (crewId: string, date: string) =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "grid", crewId, date],
      queryFn: ({ signal }) => fetchDay(crewId, date, signal),
    }),
  crews: () =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "crews"],
      queryFn: ({ signal }) => api.get("/crews", { schema: CrewList, signal }),
    }),
  progress: () =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "progress"],
      queryFn: ({ signal }) => api.get("/waiting", { schema: WaitingView, signal }),
    }),
  days: (crewId: string, from: string, to: string) =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "days", crewId, from, to],
      queryFn: ({ signal }) =>
        api.get(`/crews/${crewId}/days`, { query: { from, to }, schema: CrewDays, signal }),
    }),
  notices: (entryId: string) =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "notices", entryId],
      queryFn: ({ signal }) =>
        api.get(`/entries/${entryId}/notices`, { schema: EntryNotices, signal }),
    }),
  noticeText: (noticeId: string) =>
    queryOptions({
      queryKey: [...dayEntryQueries.all, "notice-text", noticeId],
      queryFn: ({ signal }) => api.get(`/notices/${noticeId}`, { schema: NoticeText, signal }),
    }),
};

export const saveDay = (
  crewId: string,
  body: { date: string; rows: readonly DayRowInput[] },
  idempotencyKey: string,
): Promise<DaySaveView> =>
  api.post(`/crews/${crewId}/day`, { body, schema: DaySaveView, idempotencyKey });

export const handleNotices = (
  entryId: string,
  action: "hold" | "send-now",
): Promise<EntryNotices> =>
  api.post(`/entries/${entryId}/notices/actions`, { body: { action }, schema: EntryNotices });
