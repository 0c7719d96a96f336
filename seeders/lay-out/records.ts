import { attachFindingFile } from "../../server/commands/attach-finding-file";
import { chooseMails } from "../../server/commands/choose-mails";
import { drawRecords } from "../../server/commands/draw-records";
import { issueYearReport } from "../../server/commands/issue-year-report";
import { makeCalendarFeed } from "../../server/commands/make-calendar-feed";
import { endToken, makeToken } from "../../server/commands/make-token";
import { markDrawn, signDraw } from "../../server/commands/mark-draw";
import { approveErasure, proposeErasure } from "../../server/commands/propose-erasure";
import { recordDrawRead } from "../../server/commands/record-draw-read";
import { recordRefusal } from "../../server/commands/record-refusal";
import { storeFile } from "../../server/commands/store-file";
import { proposeTransfer } from "../../server/commands/transfer-records";
import { erasePeople } from "../../server/jobs/erase-people";
import { sealTrail } from "../../server/lib/audit";
import { execute } from "../../server/lib/db";
import { fileStore } from "../../server/lib/file-store";
import { Finding } from "../../server/models/finding";
import { findDraw } from "../../server/queries/draws";
import { frameOf, originOf } from "../../server/reports/frame";
import { layOut } from "../../server/reports/lay-out";
import { createI18n } from "../../shared/i18n";
import { FILE_KINDS } from "../../shared/schemas/outing";
import { addDays } from "../../shared/time/zone";
import {
  AUDITED_DAYS_AGO,
  CALENDAR_FEEDS,
  DOES_WITHOUT,
  DRAW,
  ERASED,
  PAPER,
  REFUSALS,
  TOKENS,
  TRANSFER,
} from "../demo/records";
import { type Demo, known, siteOfWorker } from "./programme";

/** More than a page takes. */
const PAPER_BYTES = 1_000_000;

/** What people keep for themselves, papers at findings, and what is left when records are looked at and come to their end. */
export async function layOutRecords(demo: Demo, formerIds: ReadonlyMap<string, string>) {
  await layOutTokens(demo);
  await demo.at(demo.now, async () => {
    for (const sub of CALENDAR_FEEDS) await makeCalendarFeed(known(demo.actors, sub));
    for (const { by, off } of DOES_WITHOUT)
      await chooseMails(known(demo.actors, by), { off: [...off] }, 0);
    await attachPaper(demo);
  });
  await layOutRefusals(demo);
  await layOutDraw(demo);
  await layOutErasure(demo, known(formerIds, ERASED.number));
  const { site, by, successor, passesInDays, note } = TRANSFER;
  const { today } = demo.calendar(site);
  await demo.at(demo.now, () =>
    proposeTransfer(known(demo.actors, by), {
      siteId: known(demo.sites, site).id,
      successor,
      passesOn: addDays(today, passesInDays),
      note,
    }),
  );
}

async function layOutTokens(demo: Demo): Promise<void> {
  const calendar = demo.calendar("ostmere");
  for (const { by, name, scopes, madeDaysAgo, days, isEnded } of TOKENS) {
    const actor = known(demo.actors, by);
    await demo.at(calendar.instant(calendar.daysAgo(madeDaysAgo), "13:10"), async () => {
      const { id } = await makeToken(actor, { name, scopes: [...scopes], days });
      // The command counts from the clock; here that is the day of filling.
      await execute(
        "UPDATE api_tokens SET expires_at = created_at + make_interval(days => $2) WHERE id = $1",
        [id, days],
      );
      if (isEnded) await endToken(actor, { id, userId: actor.userId, name });
    });
  }
}

async function layOutRefusals(demo: Demo): Promise<void> {
  for (const { worker: number, model, kind, daysAgo, reason } of REFUSALS) {
    const site = siteOfWorker(number);
    const calendar = demo.calendar(site);
    const happenedOn = calendar.daysAgo(daysAgo);
    await demo.at(calendar.instant(happenedOn, "07:50"), () =>
      recordRefusal(demo.officer(site), known(demo.workers, number), calendar, {
        modelId: known(demo.models, model).id,
        kind,
        happenedOn,
        reason,
      }),
    );
  }
}

async function attachPaper(demo: Demo): Promise<void> {
  const { worker, fileName, title, lead, says } = PAPER;
  const site = siteOfWorker(worker);
  const officer = demo.officer(site);
  const found = await Finding.findAll({ where: { workerId: known(demo.workers, worker).id } });
  const open = found
    .filter(({ state, kind }) => state !== "closed" && kind.startsWith("over-limit"))
    .sort((a, b) => (a.kind < b.kind ? -1 : 1));
  if (!open[0]) throw new Error(`the story speaks of an open finding of ${worker}`);
  const origin = await originOf(demo.organizationId, known(demo.sites, site).id);
  const pages = await layOut({
    ...frameOf(await createI18n("en"), "en", origin),
    title,
    lead,
    blocks: says.map((text) => ({ kind: "text", text })),
  });
  const staged = await fileStore().stage(pages, PAPER_BYTES);
  const { id } = await storeFile(officer, staged, fileName, FILE_KINDS);
  await attachFindingFile(officer, open[0], { id, name: fileName, sha256: staged.sha256 }, title);
}

const auditedYear = (demo: Demo) =>
  Number(demo.calendar(DRAW.site).daysAgo(AUDITED_DAYS_AGO).slice(0, 4));

async function layOutDraw(demo: Demo): Promise<void> {
  const { by, site, seed, marks } = DRAW;
  const auditor = known(demo.actors, by);
  await demo.at(demo.now, async () => {
    const id = await drawRecords(auditor, {
      siteId: known(demo.sites, site).id,
      year: auditedYear(demo),
      seed,
      size: marks.length,
    });
    await recordDrawRead(auditor, id);
    for (const [index, mark] of marks.entries())
      await markDrawn(auditor, await findDraw(auditor, id), { position: index + 1, ...mark });
    await signDraw(auditor, await findDraw(auditor, id));
  });
}

/** The trail as far as it has come, for its head to stand on what is issued next. */
async function sealSoFar(demo: Demo): Promise<void> {
  const limit = 5000;
  while ((await demo.at(demo.now, () => sealTrail(demo.organizationId, limit))) === limit);
}

/** Both sites' year as it stands, once all else is laid out: nothing of it has changed since. */
export async function layOutYearReports(demo: Demo): Promise<void> {
  await sealSoFar(demo);
  for (const [site, { id: siteId }] of demo.sites)
    await demo.at(demo.now, () =>
      issueYearReport(demo.officer(site), { siteId, year: auditedYear(demo) }),
    );
}

/** The work process finds its job done already. */
async function layOutErasure(demo: Demo, workerId: string): Promise<void> {
  const { organizationId } = demo;
  const { site, proposedBy, approvedBy } = ERASED;
  const proposer = known(demo.actors, proposedBy);
  const erasureId = await demo.at(demo.now, async () => {
    const siteId = known(demo.sites, site).id;
    const id = await proposeErasure(proposer, { siteId, workerIds: [workerId] });
    await approveErasure(known(demo.actors, approvedBy), { id }, proposer.userId);
    return id;
  });
  await erasePeople({ organizationId, erasureId });
}
