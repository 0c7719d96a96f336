import { queryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { FindingPage } from "../../../shared/schemas/finding";
import type { FitTestView, IssueView } from "../../../shared/schemas/fit";
import type { TaskTimes } from "../../../shared/schemas/own-record";
import type { OwnReports } from "../../../shared/schemas/wearing";
import type { HistoryPage, WorkerView } from "../../../shared/schemas/worker";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

export type OwnDay = z.infer<typeof HistoryPage>["rows"][number];

export type OwnFinding = z.infer<typeof FindingPage>["rows"][number];

/** More than a worker has days in a year. */
const A_YEAR_OF_DAYS = 400;
/** More than one worker has of devices and their fits. */
const MOST_FITS = 50;
/** More than one worker has open at once. */
const MOST_FINDINGS = 100;

export const ownQueries = {
  all: ["me"] as const,
  worker: (workerId: string) =>
    queryOptions({
      queryKey: ["me", workerId],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}`, {
          schema: ownReply<WorkerView>("name", "siteId", "assignments", "can"),
          signal,
        }),
    }),
  /** What is open about this worker, with what was proposed. */
  findings: (workerId: string) =>
    queryOptions({
      queryKey: ["me", workerId, "findings"],
      queryFn: ({ signal }) =>
        api.get("/findings", {
          query: { workerId, limit: MOST_FINDINGS },
          schema: ownReply<{ rows: OwnFinding[] }>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  /** How long tasks of the day may last, where that is certain. */
  taskTimes: (workerId: string) =>
    queryOptions({
      queryKey: ["me", workerId, "task-times"],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/task-times`, { schema: ownReply<TaskTimes>("rows"), signal }),
      select: ({ rows }) => rows,
    }),
  /** What was said of the own wearing from a day on. */
  reports: (workerId: string, from: string) =>
    queryOptions({
      queryKey: ["me", workerId, "own-reports", from],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/own-reports`, {
          query: { from },
          schema: ownReply<OwnReports>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  /** What the latest fit tests found, and what was handed out and is out still. */
  fits: (workerId: string) =>
    queryOptions({
      queryKey: ["me", workerId, "fits"],
      queryFn: ({ signal }) =>
        api.get("/fit-tests", {
          query: { workerId, limit: MOST_FITS },
          schema: ownReply<{ rows: FitTestView[] }>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  issues: (workerId: string) =>
    queryOptions({
      queryKey: ["me", workerId, "issues"],
      queryFn: ({ signal }) =>
        api.get("/issues", {
          query: { workerId, state: "open", limit: MOST_FITS },
          schema: ownReply<{ rows: IssueView[] }>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  days: (workerId: string, from: string) =>
    queryOptions({
      queryKey: ["me", workerId, "days", from],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/days`, {
          query: { from, limit: A_YEAR_OF_DAYS },
          schema: ownReply<{ rows: OwnDay[] }>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
};
