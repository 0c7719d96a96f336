import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildJob,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const today = daysFromToday(0);
type Site = Awaited<ReturnType<typeof buildSite>>;

/** A crew with one of its own, and an absence and a loan of theirs, as rows. */
async function laidOut(site: Site, from = daysFromToday(2)) {
  const worker = await buildWorker({ site });
  const crew = await buildCrew({ site, members: [worker] });
  const other = await buildCrew({ site });
  const author = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
  const valid = `[${from},${daysFromToday(6)})`;
  const [absence] = await select<{ id: string }>(
    "INSERT INTO absence_spans (organization_id, crew_id, worker_id, valid, author_id) VALUES ($1, $2, $3, $4, $5) RETURNING id",
    [site.organizationId, crew.id, worker.id, valid, author.id],
  );
  const [loan] = await select<{ id: string }>(
    "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid, is_loan) VALUES ($1, $2, $3, $4, TRUE) RETURNING id",
    [site.organizationId, other.id, worker.id, valid],
  );
  return { worker, crew, other, absenceId: absence!.id, loanId: loan!.id };
}

describeEndpoint({
  route: "GET /crews/:id/attendance",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({
    method: "get",
    path: `/crews/${(await laidOut(site)).crew.id}/attendance`,
  }),
});
describeEndpoint({
  route: "POST /crews/:id/absences",
  as: "officer",
  not: "worker",
  event: "mark-absent",
  bad: { body: { toDate: daysFromToday(10) } },
  badField: "toDate",
  call: async (site) => {
    const { crew, worker } = await laidOut(site);
    const day = daysFromToday(20);
    const body = { workerId: worker.id, fromDate: day, toDate: day };
    return { method: "post", path: `/crews/${crew.id}/absences`, body };
  },
});
describeEndpoint({
  route: "POST /crews/:id/loans",
  as: "officer",
  not: "auditor",
  event: "lend-worker",
  bad: { body: { toDate: null } },
  badField: "toDate",
  call: async (site) => {
    const { crew, other, worker } = await laidOut(site);
    const day = daysFromToday(20);
    const body = { workerId: worker.id, crewId: other.id, fromDate: day, toDate: day };
    return { method: "post", path: `/crews/${crew.id}/loans`, body };
  },
});
for (const [part, end, strike] of [
  ["absences", "end-absence", "strike-absence"],
  ["loans", "end-loan", "take-back-loan"],
] as const) {
  const path = async (site: Site) => {
    const { crew, absenceId, loanId } = await laidOut(site);
    return `/crews/${crew.id}/${part}/${part === "loans" ? loanId : absenceId}`;
  };
  describeEndpoint({
    route: `PATCH /crews/:id/${part}/:spanId`,
    as: "officer",
    not: "worker",
    event: end,
    bad: { body: { toDate: today } },
    badField: "toDate",
    call: async (site) => ({
      method: "patch",
      path: await path(site),
      body: { toDate: daysFromToday(3) },
      revision: 1,
    }),
  });
  describeEndpoint({
    route: `POST /crews/:id/${part}/:spanId/strike`,
    as: "officer",
    not: "administrator",
    event: strike,
    bad: null,
    status: 200,
    call: async (site) => ({
      method: "post",
      path: `${await path(site)}/strike`,
      body: {},
      revision: 1,
    }),
  });
}

describe("a supervisor's own people", () => {
  const lay = async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const task = await buildTask({ site, levelDb: 90, metric: { kind: "steady" } });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const [worker, mate] = [
      await buildWorker({ site, jobId: job.id, name: "A. Lent" }),
      await buildWorker({ site, jobId: job.id, name: "B. Stays" }),
    ];
    const [lender, borrower] = [
      await buildUser({ organizationId, roles: ["supervisor"] }),
      await buildUser({ organizationId, roles: ["supervisor"] }),
    ];
    const crew = await buildCrew({
      site,
      name: "Early",
      members: [worker, mate],
      supervisors: [lender],
    });
    const other = await buildCrew({ site, name: "Late", supervisors: [borrower] });
    return {
      site,
      worker,
      mate,
      crew,
      other,
      own: await signInAs(lender),
      their: await signInAs(borrower),
    };
  };
  interface Row {
    worker: { id: string };
    isAbsent: boolean;
    figures: object | null;
  }
  const rowOf = (rows: Row[], id: string) => rows.find(({ worker }) => worker.id === id);

  test("who is not in is drawn so and not expected; no reason has a place", async () => {
    const { worker, mate, crew, own, their } = await lay();
    const path = `/crews/${crew.id}/absences`;
    const marked = await own.post(path, { workerId: worker.id, fromDate: today, toDate: null });
    expect(marked.status).toBe(201);
    expect(marked.body.absences).toMatchObject([
      { worker: { id: worker.id }, fromDate: today, toDate: null, revision: 1, canChange: true },
    ]);
    expect(
      await select(
        "SELECT 1 FROM information_schema.columns WHERE table_name = 'absence_spans' AND column_name ~ 'reason|kind|note'",
      ),
    ).toEqual([]);
    const sheet = (await own.get(`/crews/${crew.id}/sheet`)).body;
    expect(rowOf(sheet.expected.rows, worker.id)).toMatchObject({ isAbsent: true, figures: null });
    expect(rowOf(sheet.expected.rows, mate.id)).toMatchObject({ isAbsent: false });
    expect(rowOf(sheet.expected.rows, mate.id)?.figures).not.toBeNull();
    const again = await own.post(path, { workerId: worker.id, fromDate: daysFromToday(4) });
    expect([again.status, again.body.code]).toEqual([409, "absence-overlaps"]);
    // Another crew's supervisor learns nothing of it and changes nothing.
    expect((await their.get(`/crews/${crew.id}/attendance`)).status).toBe(404);
    const [absence] = marked.body.absences;
    const change = `${path}/${absence.id}`;
    const body = { toDate: daysFromToday(1) };
    expect((await their.send({ method: "patch", path: change, body, revision: 1 })).status).toBe(
      404,
    );
    expect((await own.send({ method: "patch", path: change, body, revision: 1 })).status).toBe(200);
    const stale = await own.send({
      method: "patch",
      path: change,
      body: { toDate: today },
      revision: 1,
    });
    expect(stale.status).toBe(412);
    expect(stale.body.current.absences[0].revision).toBe(2);
  });

  test("a loan moves the person to the other crew's sheet for its days, and no further", async () => {
    const { worker, crew, other, own, their } = await lay();
    const before = daysFromToday(-3);
    const until = daysFromToday(1);
    const loan = { workerId: worker.id, crewId: other.id, fromDate: today, toDate: until };
    expect((await their.get(`/workers/${worker.id}`)).status).toBe(404);
    const lent = await own.post(`/crews/${crew.id}/loans`, loan);
    expect(lent.body.loans).toMatchObject([{ way: "out", crewName: "Late", toDate: until }]);
    const at = async (client: typeof own, id: string) =>
      rowOf((await client.get(`/crews/${id}/sheet`)).body.expected.rows, worker.id);
    expect(await at(own, crew.id)).toMatchObject({
      figures: null,
      lentTo: { crewName: "Late", untilDate: until },
    });
    expect(await at(their, other.id)).toMatchObject({
      isLoan: true,
      lentBy: { crewName: "Early", untilDate: until },
      lentTo: null,
      figures: { hasProtector: "no" },
    });
    expect((await their.get(`/workers/${worker.id}`)).status).toBe(200);
    // Days before the loan stay with the own crew.
    expect((await their.get(`/workers/${worker.id}/days/${before}`)).status).toBe(404);

    const twice = await own.post(`/crews/${crew.id}/loans`, { ...loan, fromDate: until });
    expect([twice.status, twice.body.code]).toEqual([409, "loan-overlaps"]);
    // Whoever borrows can neither lend on nor end the loan.
    const on = await their.post(`/crews/${other.id}/loans`, { ...loan, crewId: crew.id });
    expect([on.status, on.body.issues[0].code]).toEqual([422, "not-in-crew"]);
    const id = lent.body.loans[0].id;
    const end = {
      method: "patch",
      path: `/crews/${other.id}/loans/${id}`,
      body: { toDate: today },
      revision: 1,
    } as const;
    expect((await their.send(end)).status).toBe(404);
    // They say who is not in only within the loan.
    const absent = { workerId: worker.id, fromDate: today, toDate: daysFromToday(9) };
    const beyond = await their.post(`/crews/${other.id}/absences`, absent);
    expect([beyond.status, beyond.body.issues[0].code]).toEqual([422, "beyond-loan"]);
    // What the lender knows of later days is cut to the loan.
    await own.post(`/crews/${crew.id}/absences`, absent);
    expect((await their.get(`/crews/${other.id}/attendance`)).body.absences).toMatchObject([
      { fromDate: today, toDate: until, canChange: false },
    ]);
  });

  test("whoever is lent away after the day was saved takes nobody else out of the count", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const people = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    const [lent, absent] = people;
    const crew = await buildCrew({ site, members: people });
    const other = await buildCrew({ site });
    await buildShift(lent!, { date: today, crewId: crew.id });
    await select(
      "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid, is_loan) VALUES ($1, $2, $3, $4, TRUE)",
      [site.organizationId, other.id, lent!.id, `[${today},${daysFromToday(2)})`],
    );
    await select(
      "INSERT INTO absences (organization_id, crew_id, worker_id, date) VALUES ($1, $2, $3, $4)",
      [site.organizationId, crew.id, absent!.id, today],
    );
    const officer = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
    const client = await signInAs(officer);
    // Three people: one entered, one not in, one who waits; and the borrowing crew waits for nobody: that day stands.
    const counts = { members: 3, saved: 1, absent: 1 };
    const waiting = await client.get("/waiting");
    expect(waiting.body.crews.find(({ id }: { id: string }) => id === crew.id)).toMatchObject(
      counts,
    );
    expect(waiting.body.crews.find(({ id }: { id: string }) => id === other.id)).toMatchObject({
      members: 0,
      saved: 0,
      absent: 0,
    });
    const days = await client.get(`/crews/${crew.id}/days?from=${today}&to=${today}`);
    expect(days.body.rows).toMatchObject([{ date: today, ...counts }]);
  });

  test("nobody is lent on days on which they are said not to be in", async () => {
    const { worker, crew, other, own } = await lay();
    const away = { fromDate: daysFromToday(2), toDate: daysFromToday(4) };
    await own.post(`/crews/${crew.id}/absences`, { workerId: worker.id, ...away });
    const lend = (fromDate: string, toDate: string) =>
      own.post(`/crews/${crew.id}/loans`, {
        workerId: worker.id,
        crewId: other.id,
        fromDate,
        toDate,
      });
    const refused = await lend(daysFromToday(1), daysFromToday(3));
    expect(refused.status).toBe(422);
    expect(refused.body.issues).toMatchObject([
      { path: ["fromDate"], code: "not-in-then", params: away },
    ]);
    expect((await lend(today, daysFromToday(1))).status).toBe(201);
  });

  test("only to a crew in use of the same site, of one's own members", async () => {
    const { site, worker, crew, own } = await lay();
    const elsewhere = await buildSite({ organizationId: site.organizationId });
    const far = await buildCrew({ site: elsewhere });
    const loan = { workerId: worker.id, fromDate: today, toDate: today };
    const path = `/crews/${crew.id}/loans`;
    expect((await own.post(path, { ...loan, crewId: far.id })).status).toBe(404);
    const same = await own.post(path, { ...loan, crewId: crew.id });
    expect(same.body.issues[0]).toMatchObject({ path: ["crewId"], code: "other-crew" });
  });

  test("a loan that has begun is ended and not taken back", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { crew, loanId } = await laidOut(site, daysFromToday(-1));
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const path = `/crews/${crew.id}/loans/${loanId}/strike`;
    const answer = await officer.send({ method: "post", path, body: {}, revision: 1 });
    expect([answer.status, answer.body.code]).toEqual([409, "loan-has-begun"]);
  });
});
