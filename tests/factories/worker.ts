import { daysRange } from "./days";
import { insert, next } from "./insert";
import { buildSite, type Site } from "./site";
import { buildUser, type User } from "./user";

export interface Worker {
  id: string;
  organizationId: string;
  siteId: string;
  name: string;
  employeeNumber: string;
}

interface WorkerOverrides {
  site?: Site;
  jobId?: string;
  name?: string;
  employeeNumber?: string;
  hiredOn?: string;
  leftOn?: string;
  mustWear?: boolean;
  personalTargetDb?: number;
  language?: string;
}

export async function buildWorker(overrides: WorkerOverrides = {}): Promise<Worker> {
  const { site = await buildSite(), ...rest } = overrides;
  const { organizationId, id: siteId } = site;
  const count = next();
  const facts = {
    name: `Worker ${count}`,
    employeeNumber: String(10_000 + count),
    hiredOn: "2020-01-01",
    ...rest,
  };
  const id = await insert("workers", { organizationId, siteId, ...facts });
  return { id, organizationId, siteId, name: facts.name, employeeNumber: facts.employeeNumber };
}

export interface Crew {
  id: string;
  organizationId: string;
  siteId: string;
  name: string;
}

interface CrewOverrides {
  site?: Site;
  name?: string;
  members?: Worker[];
  supervisors?: User[];
  usualStart?: string;
  usualLengthMin?: number;
  /** Of the members and supervisors. */
  fromDate?: string;
  toDate?: string | null;
}

/** A crew, with whom it is given from 2020 on. */
export async function buildCrew(overrides: CrewOverrides = {}): Promise<Crew> {
  const site = overrides.site ?? (await buildSite());
  const { organizationId, id: siteId } = site;
  const { name = `Crew ${next()}`, usualStart = "06:00", usualLengthMin = 480 } = overrides;
  const id = await insert("crews", { organizationId, siteId, name, usualStart, usualLengthMin });
  const valid = daysRange(overrides.fromDate ?? "2020-01-01", overrides.toDate ?? null);
  for (const { id: workerId } of overrides.members ?? []) {
    await insert("crew_memberships", { organizationId, crewId: id, workerId, valid });
  }
  for (const { id: userId } of overrides.supervisors ?? []) {
    await insert("crew_supervisors", { organizationId, crewId: id, userId, valid });
  }
  return { id, organizationId, siteId, name };
}

/** A supervisor of a new crew with these members. */
export async function buildSupervisorOf(site: Site, ...members: Worker[]): Promise<User> {
  const user = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
  await buildCrew({ site, members, supervisors: [user] });
  return user;
}
