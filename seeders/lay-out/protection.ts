import { addProtectorCombination } from "../../server/commands/add-protector-combination";
import { assignProtector } from "../../server/commands/assign-protector";
import { enterStock } from "../../server/commands/enter-stock";
import { issueProtector } from "../../server/commands/issue-protector";
import { keepMicrophoneCheck } from "../../server/commands/keep-microphone-check";
import { recordWearingRound } from "../../server/commands/record-wearing-round";
import { createWarningSignal } from "../../server/commands/save-warning-signal";
import { typeMicrophoneCheck } from "../../server/commands/type-microphone-check";
import { MicrophoneCheck } from "../../server/models/fit";
import { IssueInput } from "../../shared/schemas/fit";
import { TypedCheckInput } from "../../shared/schemas/microphone-check";
import { CombinationInput } from "../../shared/schemas/protector";
import { StockMoveInput } from "../../shared/schemas/stock";
import { WarningSignalInput } from "../../shared/schemas/warning-signal";
import { WearingRoundInput } from "../../shared/schemas/wearing";
import {
  ACTIVE_CHECK,
  HEADSET_AUDIO_DB,
  ISSUES,
  ROUNDS,
  SIGNALS,
  STOCK,
  TESTED_TOGETHER,
} from "../demo/protection";
import { type Demo, known, siteOfWorker, taskKey } from "./programme";

/** Two kinds are always on the counter, whatever is taken in the end. */
const ALSO_OFFERED = ["Alder foam", "Fenmuff low", "Sedge band"];

/** Stock, issues, warning signals and tests: what is known of protectors beside their labels. */
export async function layOutProtection(demo: Demo): Promise<void> {
  await layOutStock(demo);
  await layOutIssues(demo);
  await layOutSignals(demo);
  await layOutTests(demo);
}

async function layOutStock(demo: Demo): Promise<void> {
  for (const { site, model, part, moves } of STOCK) {
    const calendar = demo.calendar(site);
    for (const { kind, quantity, daysAgo } of moves) {
      const movedOn = calendar.daysAgo(Math.min(daysAgo, demo.spanDays));
      await demo.at(calendar.instant(movedOn, "07:30"), () =>
        enterStock(
          demo.officer(site),
          known(demo.sites, site),
          StockMoveInput.parse({
            siteId: known(demo.sites, site).id,
            modelId: known(demo.models, model).id,
            part,
            kind,
            quantity,
            movedOn,
          }),
        ),
      );
    }
  }
}

async function layOutIssues(demo: Demo): Promise<void> {
  for (const { worker: number, model, daysAgo, isAcknowledged } of ISSUES) {
    if (daysAgo >= demo.spanDays) continue;
    const site = siteOfWorker(number);
    const calendar = demo.calendar(site);
    const issuedOn = calendar.daysAgo(daysAgo);
    const offered = [...new Set([model, ...ALSO_OFFERED])];
    await demo.at(calendar.instant(issuedOn, "07:40"), () =>
      issueProtector(
        demo.officer(site),
        known(demo.workers, number),
        known(demo.sites, site),
        IssueInput.parse({
          modelId: known(demo.models, model).id,
          issuedOn,
          offeredModelIds: offered.map((name) => known(demo.models, name).id),
          wasInstructed: true,
          isAcknowledged,
        }),
      ),
    );
  }
}

/** Before the days that rest on them: what was seen is there when a shift leaves its wearing time blank. */
export async function layOutRounds(demo: Demo): Promise<void> {
  for (const { site, daysAgo, note, looks } of ROUNDS) {
    if (daysAgo >= demo.spanDays) continue;
    const calendar = demo.calendar(site);
    const seenOn = calendar.daysAgo(daysAgo);
    await demo.at(calendar.instant(seenOn, "11:20"), () =>
      recordWearingRound(
        demo.officer(site),
        known(demo.sites, site),
        WearingRoundInput.parse({
          siteId: known(demo.sites, site).id,
          seenOn,
          note,
          looks: looks.map(({ worker, task, worn, seen }) => ({
            workerId: known(demo.workers, worker).id,
            taskId: known(demo.tasks, taskKey(site, task)).id,
            wornCount: worn,
            seenCount: seen,
          })),
        }),
      ),
    );
  }
}

async function layOutSignals(demo: Demo): Promise<void> {
  for (const { site, area, ...signal } of SIGNALS) {
    await demo.at(demo.calendar(site).instant(demo.calendar(site).first, "09:00"), () =>
      createWarningSignal(
        demo.officer(site),
        WarningSignalInput.parse({
          ...signal,
          siteId: known(demo.sites, site).id,
          areaId: area === null ? null : known(demo.areas, area).id,
        }),
      ),
    );
  }
}

async function layOutTests(demo: Demo): Promise<void> {
  const calendar = demo.calendar("ostmere");
  const officer = demo.officer("ostmere");
  const together = calendar.daysAgo(Math.min(TESTED_TOGETHER.daysAgo, demo.spanDays));
  await demo.at(calendar.instant(together, "10:15"), () =>
    addProtectorCombination(
      officer,
      CombinationInput.parse({
        innerModelId: known(demo.models, TESTED_TOGETHER.inner).id,
        outerModelId: known(demo.models, TESTED_TOGETHER.outer).id,
        effectiveFrom: together,
        bands: TESTED_TOGETHER.bands,
        reason: "Test report of the two together",
      }),
    ),
  );
  const headset = calendar.daysAgo(8);
  await demo.at(calendar.instant(headset, "07:45"), () =>
    assignProtector(
      officer,
      [known(demo.workers, "4433")],
      {
        innerModelId: known(demo.models, "Curlew headset").id,
        outerModelId: null,
        taskId: known(demo.tasks, taskKey("ostmere", "Linishing")).id,
        areaId: null,
        fromDate: headset,
        toDate: null,
        size: null,
        audioDb: HEADSET_AUDIO_DB,
      },
      { field: (name) => [name], worker: (_index, name) => ["4433", name] },
    ),
  );
  await checkActivePart(demo);
}

async function checkActivePart(demo: Demo): Promise<void> {
  const { worker: number, model, task, daysAgo, outsideDb, ears } = ACTIVE_CHECK;
  const calendar = demo.calendar("ostmere");
  const officer = demo.officer("ostmere");
  const testedOn = calendar.daysAgo(daysAgo);
  const worker = known(demo.workers, number);
  const under = (takenDb: readonly number[]) =>
    outsideDb.map((levelDb, band) => levelDb! - takenDb[band]!);
  await demo.at(calendar.instant(testedOn, "13:10"), async () => {
    let joinFitTestId: string | null = null;
    for (const { ear, reductionDb, activeDb } of ears) {
      const id = await typeMicrophoneCheck(
        officer,
        worker,
        TypedCheckInput.parse({
          modelId: known(demo.models, model).id,
          ear,
          correction: {
            kind: "none",
            bandsDb: [0, 0, 0, 0, 0, 0, 0, 0],
            source: "Both microphones at the cup, none in the canal",
          },
          taskId: known(demo.tasks, taskKey("ostmere", task)).id,
          bands: {
            outsideOffDb: outsideDb,
            insideOffDb: under(reductionDb),
            outsideOnDb: outsideDb,
            insideOnDb: under(reductionDb.map((offDb, band) => offDb + activeDb[band]!)),
          },
        }),
      );
      const check = (await MicrophoneCheck.findByPk(id))!;
      joinFitTestId = await keepMicrophoneCheck(officer, check, worker, {
        testedOn,
        size: null,
        needDb: null,
        joinFitTestId,
      });
    }
  });
}
