import { randomUUID } from "node:crypto";
import { loadActor } from "../../server/auth/actor";
import { addCrewMember } from "../../server/commands/add-crew-member";
import { addCrewSupervisor } from "../../server/commands/add-crew-supervisor";
import { assignProtector } from "../../server/commands/assign-protector";
import { createArea } from "../../server/commands/create-area";
import { createCrew } from "../../server/commands/create-crew";
import { createInstrument } from "../../server/commands/create-instrument";
import { createJob } from "../../server/commands/create-job";
import { createProtector } from "../../server/commands/create-protector";
import { createSite } from "../../server/commands/create-site";
import { createTask } from "../../server/commands/create-task";
import { createUser } from "../../server/commands/create-user";
import { createWorker } from "../../server/commands/create-worker";
import { issueSignInCode } from "../../server/commands/issue-sign-in-code";
import { mapGroup } from "../../server/commands/map-group";
import { execute, inTransaction } from "../../server/lib/db";
import { Actor } from "../../server/lib/policy";
import type { Instrument } from "../../server/models/instrument";
import type { ProtectorModel } from "../../server/models/protector";
import type { Area, Site } from "../../server/models/site";
import type { Survey } from "../../server/models/survey";
import type { Job, Task } from "../../server/models/task";
import type { Crew, Worker } from "../../server/models/worker";
import { NewProtectorInput } from "../../shared/schemas/protector";
import { InstrumentInput } from "../../shared/schemas/run";
import { NewTaskInput } from "../../shared/schemas/task";
import { ASSIGNMENTS } from "../demo/assignments";
import { type DemoPerson, type DemoWorker, GROUP_ROLES, PEOPLE, WORKERS } from "../demo/people";
import {
  AREAS,
  CREWS,
  INSTRUMENTS,
  JOBS,
  ORGANIZATION,
  SITES,
  type SiteKey,
  TASKS,
} from "../demo/programme";
import { PROTECTORS } from "../demo/protectors";
import { SiteCalendar } from "./calendar";
import { RECORDED_AT } from "./clock";

/** What has been laid out, by the names that the data use. */
export class Demo {
  readonly organizationId = randomUUID();
  readonly calendars = new Map<SiteKey, SiteCalendar>();
  readonly sites = new Map<SiteKey, Site>();
  readonly areas = new Map<string, Area>();
  readonly tasks = new Map<string, Task>();
  readonly jobs = new Map<string, Job>();
  readonly crews = new Map<string, Crew>();
  readonly workers = new Map<string, Worker>();
  readonly models = new Map<string, ProtectorModel>();
  readonly instruments = new Map<string, Instrument>();
  readonly actors = new Map<string, Actor>();
  readonly codes = new Map<string, string>();
  /** With those drawn for it. */
  readonly surveys = new Map<string, { survey: Survey; drawn: readonly string[] }>();

  constructor(
    readonly now: Date,
    readonly spanDays: number,
  ) {
    for (const key of Object.keys(SITES) as SiteKey[])
      this.calendars.set(key, new SiteCalendar(SITES[key].timeZone, now, spanDays));
  }

  /** One transaction whose records bear this time. */
  at<T>(instant: Date, work: () => Promise<T>): Promise<T> {
    return inTransaction(
      { organizationId: this.organizationId, settings: { [RECORDED_AT]: instant.toISOString() } },
      work,
    );
  }

  calendar(site: SiteKey): SiteCalendar {
    return known(this.calendars, site);
  }

  officer(site: SiteKey): Actor {
    return known(this.actors, OFFICERS[site]);
  }
}

/** @throws Error for a name that the data do not have: a slip in a table. */
export function known<Key, Value>(map: ReadonlyMap<Key, Value>, name: Key): Value {
  const found = map.get(name);
  if (found === undefined) throw new Error(`the demo's data name «${name}», which is not there`);
  return found;
}

const OFFICERS: Record<SiteKey, string> = { ostmere: "s.ferrand", "kettle-bend": "d.calloway" };
const siteOfCrew = (name: string): SiteKey => CREWS.find((crew) => crew.name === name)!.site;
export const taskKey = (site: SiteKey, name: string) => `${site} ${name}`;
export const siteOfWorker = (number: string): SiteKey =>
  siteOfCrew(WORKERS.find((worker) => worker.number === number)!.crew);

/** The first surveys took the weeks between this and the first day. */
const SET_UP_BEFORE_DAYS = 60;
/** When the programme itself was written down. */
export const setUpAt = (calendar: SiteCalendar): Date =>
  calendar.instant(calendar.daysAgo(calendar.spanDays + SET_UP_BEFORE_DAYS), "10:00");

/** Organization, people and programme, by the application's own commands. */
export async function layOutProgramme(demo: Demo): Promise<void> {
  const administrator = new Actor(
    randomUUID(),
    demo.organizationId,
    "Setting up",
    null,
    "en",
    null,
    [
      { role: "administrator", siteId: null },
      { role: "officer", siteId: null },
    ],
  );
  await demo.at(setUpAt(demo.calendar("ostmere")), async () => {
    await execute("INSERT INTO organizations (id, name) VALUES ($1, $2)", [
      demo.organizationId,
      ORGANIZATION,
    ]);
    await layOutSites(demo, administrator);
    await layOutWorkers(demo, administrator);
    await layOutUsers(demo, administrator);
    await layOutCrews(demo);
    await layOutProtectors(demo);
  });
  // A code is good for thirty days from now.
  await inTransaction({ organizationId: demo.organizationId }, async () => {
    for (const { sub, worker, bindsByCode } of PEOPLE) {
      if (!bindsByCode || !worker) continue;
      const { code } = await issueSignInCode(demo.officer("ostmere"), known(demo.workers, worker));
      demo.codes.set(sub, code);
    }
  });
}

async function layOutSites(demo: Demo, actor: Actor): Promise<void> {
  for (const [key, { rules, ...facts }] of Object.entries(SITES) as [
    SiteKey,
    (typeof SITES)[SiteKey],
  ][]) {
    const settings = {
      wearFromDb: 85,
      creditsActivePart: false,
      usesUncertainty: false,
      comparisonRuleSets: [],
      ...rules,
      effectiveFrom: firstDay(demo, key),
    };
    demo.sites.set(key, await createSite(actor, { ...facts, settings }));
  }
  const siteId = (key: SiteKey) => known(demo.sites, key).id;
  for (const { site, ...area } of AREAS)
    demo.areas.set(
      area.name,
      await createArea(actor, { ...area, siteId: siteId(site), isArchived: false }),
    );
  for (const { site, area, name, peakDb, samplesDb, sinceDaysAgo, ...level } of TASKS) {
    const areaId = area === null ? null : known(demo.areas, area).id;
    demo.tasks.set(
      taskKey(site, name),
      await createTask(
        actor,
        NewTaskInput.parse({
          siteId: siteId(site),
          areaId,
          name,
          // What was sampled gets its level from its survey.
          level:
            samplesDb.length > 0
              ? null
              : {
                  ...level,
                  peak: { levelDb: peakDb, weighting: "C" },
                  grade: site === "ostmere" ? "estimate" : "task-level",
                  effectiveFrom:
                    sinceDaysAgo === undefined
                      ? firstDay(demo, site)
                      : demo.calendar(site).daysAgo(sinceDaysAgo),
                },
        }),
      ),
    );
  }
  for (const { site, name, tasks } of JOBS) {
    const nominal = Object.entries(tasks).map(([task, durationMin]) => ({
      taskId: known(demo.tasks, taskKey(site, task)).id,
      durationMin,
    }));
    demo.jobs.set(
      name,
      await createJob(actor, { siteId: siteId(site), name, isArchived: false, tasks: nominal }),
    );
  }
  for (const { site, calibrationDueInDays, ...facts } of INSTRUMENTS) {
    const calibrationDueOn = demo.calendar(site).daysAgo(-calibrationDueInDays);
    demo.instruments.set(
      facts.name,
      await createInstrument(
        actor,
        InstrumentInput.parse({ ...facts, siteId: siteId(site), calibrationDueOn }),
      ),
    );
  }
}

/** The first day of the demo at a site: rules, levels and protectors hold from it. */
const firstDay = (demo: Demo, site: SiteKey) => demo.calendar(site).first;

/** Whoever was not hired within the demo had been there for years, each for another time. */
const hiredOn = (calendar: SiteCalendar, { number, hiredDaysAgo }: DemoWorker): string =>
  calendar.daysAgo(hiredDaysAgo ?? 600 + (Number(number) % 97) * 41);

async function layOutWorkers(demo: Demo, actor: Actor): Promise<void> {
  for (const one of WORKERS) {
    const site = siteOfCrew(one.crew);
    const calendar = demo.calendar(site);
    demo.workers.set(
      one.number,
      await createWorker(actor, {
        siteId: known(demo.sites, site).id,
        jobId: known(demo.jobs, one.job).id,
        employeeNumber: one.number,
        name: one.name,
        employer: one.employer ?? "own",
        employerName: one.employerName ?? null,
        language: one.language ?? "en",
        hiredOn: hiredOn(calendar, one),
        leftOn: one.leftDaysAgo === undefined ? null : calendar.daysAgo(one.leftDaysAgo),
        mustWear: one.mustWear ?? false,
        personalTargetDb: one.personalTargetDb ?? null,
        wornGear: [],
        requirementReason: one.requirementReason ?? null,
      }),
    );
  }
}

async function layOutUsers(demo: Demo, actor: Actor): Promise<void> {
  for (const person of PEOPLE) {
    if (person.grants.length === 0) continue;
    const { id } = await createUser(actor, {
      name: person.name,
      email: person.email,
      expectedSubject: null,
      language: person.language,
      workerId: person.worker ? known(demo.workers, person.worker).id : null,
      grants: person.grants.map(({ role, site }) => ({
        role,
        siteId: site === null ? null : known(demo.sites, site).id,
      })),
    });
    demo.actors.set(person.sub, await loadActor(id, 1));
  }
  const administrator = known(demo.actors, "i.vandermolen");
  for (const { groupName, role, site } of GROUP_ROLES)
    await mapGroup(administrator, { groupName, role, siteId: known(demo.sites, site).id });
}

async function layOutCrews(demo: Demo): Promise<void> {
  for (const { site, name, usualStart, usualLengthMin } of CREWS) {
    const actor = demo.officer(site);
    const crew = await createCrew(actor, {
      siteId: known(demo.sites, site).id,
      name,
      usualStart,
      usualLengthMin,
      isArchived: false,
    });
    demo.crews.set(name, crew);
    for (const { number } of WORKERS.filter(
      (worker) => worker.crew === name && isStillThere(demo, worker),
    )) {
      const worker = known(demo.workers, number);
      await addCrewMember(actor, crew, worker, {
        workerId: worker.id,
        fromDate: startOf(demo, site, worker),
        toDate: worker.leftOn,
        isLoan: false,
      });
    }
    for (const person of PEOPLE.filter(({ supervises }) => supervises?.includes(name))) {
      await addCrewSupervisor(actor, crew, {
        userId: supervisorId(demo, person),
        fromDate: firstDay(demo, site),
        toDate: null,
      });
    }
  }
}

const supervisorId = (demo: Demo, { sub }: DemoPerson) => known(demo.actors, sub).userId;

/** Has not left before the demo begins: a short one may begin after somebody left. */
const isStillThere = (demo: Demo, { leftDaysAgo }: DemoWorker): boolean =>
  leftDaysAgo === undefined || leftDaysAgo <= demo.spanDays;

/** The later of a worker's first day and the demo's. */
const startOf = (demo: Demo, site: SiteKey, { hiredOn: hired }: Worker): string =>
  hired > firstDay(demo, site) ? hired : firstDay(demo, site);

async function layOutProtectors(demo: Demo): Promise<void> {
  const actor = demo.officer("ostmere");
  // The register is the organization's: it begins where the first site does.
  const effectiveFrom = [firstDay(demo, "ostmere"), firstDay(demo, "kettle-bend")].sort()[0];
  for (const { name, kind, data } of PROTECTORS) {
    demo.models.set(
      name,
      await createProtector(
        actor,
        NewProtectorInput.parse({ name, kind, data: { ...data, effectiveFrom } }),
      ),
    );
  }
  for (const { who, inner, task, toDaysAgo } of ASSIGNMENTS) {
    for (const number of who.filter((one) =>
      isStillThere(demo, WORKERS.find((worker) => worker.number === one)!),
    )) {
      const worker = known(demo.workers, number);
      const site = siteOfWorker(number);
      await assignProtector(
        demo.officer(site),
        [worker],
        {
          innerModelId: known(demo.models, inner).id,
          outerModelId: null,
          taskId: task ? known(demo.tasks, taskKey(site, task)).id : null,
          areaId: null,
          fromDate: startOf(demo, site, worker),
          toDate: toDaysAgo === undefined ? null : demo.calendar(site).daysAgo(toDaysAgo),
          size: null,
          audioDb: null,
        },
        { field: (name) => [name], worker: (_index, name) => [number, name] },
      );
    }
  }
}
