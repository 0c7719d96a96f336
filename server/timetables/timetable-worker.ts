import type { TimetableProblem } from "../../shared/planning/timetable";
import { serveWorker } from "../lib/serve-worker";
import { solveTimetable, type TimetableAnswer } from "./solve-timetable";

serveWorker<TimetableProblem, TimetableAnswer>(async (problem, onProgress) => ({
  reply: await solveTimetable(problem, onProgress),
}));
