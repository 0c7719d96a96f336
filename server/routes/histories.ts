import { once } from "node:events";
import type { Response } from "express";
import { MISSING } from "../../shared/acoustics/history";
import { IdParams } from "../../shared/schemas/common";
import {
  Envelope,
  EnvelopeQuery,
  HistoryAnalysis,
  HistoryStretches,
  HistoryView,
} from "../../shared/schemas/history";
import { changeHistoryStretches } from "../commands/change-history-stretches";
import { CHUNK_VALUES } from "../histories/level-codec";
import { recordAudit } from "../lib/audit";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError, stale } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { TimeHistory } from "../models/survey";
import { historyPolicy, may } from "../policies";
import { historyAnalysis, historyEnvelope, historyFacts, historyView } from "../queries/histories";
import { levelsBetween } from "../queries/history-levels";

const visibleHistory = (id: string, actor: Actor, options?: { lock?: boolean }) =>
  findVisible(TimeHistory, historyPolicy, id, actor, options);

/** Hundredths as decibels, without a binary fraction's tail. */
function levelText(level: number): string {
  const size = Math.abs(level);
  return `${level < 0 ? "-" : ""}${Math.floor(size / 100)}.${String(size % 100).padStart(2, "0")}`;
}

/** An hour's chunk at a time: a day of eighths of seconds is never whole in memory. */
async function streamLevels(actor: Actor, history: TimeHistory, response: Response): Promise<void> {
  const scope = { organizationId: actor.organizationId, readOnly: true };
  const { channels, intervalMs, valuesCount } = await inTransaction(scope, () =>
    historyFacts(history.id),
  );
  response.write(
    `time,${channels.map((channel) => `${channel.replaceAll("-", "_")}_db`).join(",")}\r\n`,
  );
  const startMs = history.startsAt.getTime();
  for (
    let fromIndex = 0;
    fromIndex < valuesCount && !response.destroyed;
    fromIndex += CHUNK_VALUES
  ) {
    const toIndex = Math.min(valuesCount, fromIndex + CHUNK_VALUES);
    const found = await inTransaction(scope, () =>
      levelsBetween({ historyId: history.id, channels, fromIndex, toIndex }),
    );
    let text = "";
    for (let index = 0; index < toIndex - fromIndex; index++) {
      text += new Date(startMs + (fromIndex + index) * intervalMs).toISOString();
      for (const { levels } of found) {
        const level = levels[index]!;
        text += level === MISSING ? "," : `,${levelText(level)}`;
      }
      text += "\r\n";
    }
    if (!response.write(text))
      await Promise.race([once(response, "drain"), once(response, "close")]);
  }
  response.end();
}

export function defineHistoryRoutes(): void {
  endpoint.get(
    "/histories/:id",
    { summary: "A time history", may: may.export, params: IdParams, reply: HistoryView },
    async ({ actor, params }) => historyView(actor, (await visibleHistory(params.id, actor)).id),
  );

  endpoint.get(
    "/histories/:id/envelope",
    {
      summary: "What a chart of a time history draws",
      may: may.export,
      params: IdParams,
      query: EnvelopeQuery,
      reply: Envelope,
    },
    async ({ actor, params, query }) =>
      historyEnvelope((await visibleHistory(params.id, actor)).id, query),
  );

  endpoint.get(
    "/histories/:id/analysis",
    {
      summary: "What a time history comes to",
      may: may.export,
      params: IdParams,
      reply: HistoryAnalysis,
    },
    async ({ actor, params }) => historyAnalysis((await visibleHistory(params.id, actor)).id),
  );

  endpoint.get(
    "/histories/:id/levels.csv",
    {
      summary: "Every level of a time history as a file, streamed",
      may: may.export,
      params: IdParams,
      streams: true,
    },
    async ({ actor, params, response }) => {
      const history = await inTransaction({ organizationId: actor.organizationId }, async () => {
        const found = await visibleHistory(params.id, actor);
        await recordAudit(actor, {
          action: "export-history",
          subjectKind: "time-history",
          subjectId: found.id,
          values: {},
        });
        return found;
      });
      response
        .attachment(`levels-${history.startsAt.toISOString().slice(0, 10)}.csv`)
        .type("text/csv; charset=utf-8; header=present");
      await streamLevels(actor, history, response);
    },
  );

  endpoint.put(
    "/histories/:id/stretches",
    {
      summary: "Brackets of tasks under a time history, and what is left out of it",
      may: may.officer,
      params: IdParams,
      body: HistoryStretches,
      reply: HistoryView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const history = await visibleHistory(params.id, actor, { lock: true });
      authorize(historyPolicy, actor, "change", history);
      if (history.revision !== ifMatch) throw stale(await historyView(actor, history.id));
      if (history.isVoid) throw new AppError("wrong-state", 409);
      await changeHistoryStretches(actor, history, body);
      return historyView(actor, history.id);
    },
  );
}
