import { beforeAll, describe, expect, test } from "vitest";
import { routes } from "../../server/lib/endpoint";
import { ROLES, type Role } from "../../server/lib/policy";
import {
  buildSite,
  buildUser,
  buildWorker,
  type Call,
  type Client,
  signInAs,
  testApp,
} from "../factories";

const everybody = "officer supervisor worker auditor administrator";

/** Which roles a route lets in at all; every other role gets 403, whatever it asks for. */
const matrix: Record<string, string> = {
  "DELETE /shifts/:id": "officer",
  "GET /crews/:id/day": "officer",
  "GET /crews/:id/days": "officer",
  "GET /crews/:id/sheet": "officer supervisor auditor",
  "GET /entries/:entryId/notices": "officer",
  "GET /findings": "officer supervisor worker auditor",
  "GET /findings/:id": "officer supervisor worker auditor",
  "GET /findings/:id/follow-up": "officer supervisor worker auditor",
  "POST /findings/:id/measures": "officer",
  "PUT /findings/:id/measures/:measureId": "officer",
  "POST /findings/:id/measures/:measureId/strike": "officer",
  "POST /findings/:id/files": "officer",
  "POST /findings/:id/files/:attachmentId/removal": "officer",
  "GET /trainings": "officer auditor",
  "GET /trainings/:id": "officer auditor",
  "GET /training-dues": "officer auditor",
  "GET /workers/:id/training": "officer supervisor worker auditor",
  "POST /trainings": "officer",
  "PUT /trainings/:id": "officer",
  "POST /trainings/:id/strike": "officer",
  "GET /calendar/:secret": "public",
  "GET /me/calendar": "officer supervisor auditor",
  "POST /me/calendar": "officer supervisor auditor",
  "POST /me/calendar/end": "officer supervisor auditor",
  "GET /duties": "officer supervisor auditor",
  "GET /escalations": "officer",
  "PUT /sites/:id/escalation": "officer",
  "POST /roster-imports": "officer",
  "GET /roster-imports/template.csv": "officer",
  "GET /letters": "officer auditor",
  "GET /letters/:id": "officer auditor",
  "POST /letters/:id/acknowledgement": "officer",
  "GET /acknowledgements/:secret": "public",
  "POST /acknowledgements/:secret": "public",
  "GET /notices/:id": "officer supervisor worker auditor",
  "GET /results/:id": "officer supervisor worker auditor",
  "GET /runs": "officer supervisor auditor",
  "GET /runs/:id": "officer supervisor worker auditor",
  "GET /shifts/:id": "officer supervisor worker auditor",
  "GET /waiting": "officer",
  "GET /try-changes": "officer",
  "GET /plans": "officer auditor",
  "GET /plans/:id": "officer auditor",
  "POST /plans": "officer",
  "POST /plans/:id/put-aside": "officer",
  "GET /fitting/lookup": "officer auditor",
  "GET /workers/:id/fitting": "officer auditor",
  "GET /protector-choice": "officer auditor",
  "GET /issue-slips": "officer auditor",
  "GET /fit-tests": "officer supervisor worker auditor",
  "POST /workers/:id/fit-tests": "officer",
  "PUT /fit-tests/:id": "officer",
  "POST /fit-tests/:id/void": "officer",
  "GET /issues": "officer supervisor worker auditor",
  "POST /workers/:id/issues": "officer",
  "POST /issues/:id/acknowledge": "officer worker",
  "POST /issues/:id/end": "officer",
  "GET /workers/:id/refusals": "officer",
  "POST /workers/:id/refusals": "officer",
  "PUT /sites/:id/fit-policy": "officer",
  "POST /sites/:id/fit-policy/preview": "officer",
  "GET /sites/:id/fits": "officer auditor",
  "GET /workers/:id/days": "officer supervisor worker auditor",
  "GET /workers/:id/days/:date": "officer supervisor worker auditor",
  "POST /crews/:id/day": "officer",
  "POST /entries/:entryId/notices/actions": "officer",
  "POST /findings/:id/steps": "officer supervisor",
  "POST /runs": "officer",
  "POST /workers/:id/problems": "worker",
  "PUT /runs/:id": "officer",
  "PUT /shifts/:id": "officer",
  "GET /areas": "officer supervisor auditor",
  "POST /areas": "officer",
  "PUT /areas/:id": "officer",
  "POST /assignments/many": "officer",
  "PATCH /assignments/:id": "officer",
  "GET /audit-events": "auditor administrator",
  "GET /exports/year.zip": "officer auditor",
  "GET /trail-check": "auditor",
  "GET /trail-check/rows/:table": "auditor",
  "GET /trail-check/seals": "auditor",
  "GET /auth/callback": "public",
  "GET /auth/sign-in": "public",
  "POST /auth/sign-out": "public",
  "POST /auth/worker-code": "public",
  "GET /crews": "officer supervisor auditor",
  "POST /crews": "officer",
  "GET /crews/:id": "officer supervisor auditor",
  "GET /supervisors": "officer",
  "PUT /crews/:id": "officer",
  "POST /crews/:id/memberships": "officer",
  "PATCH /crews/:id/memberships/:spanId": "officer",
  "POST /crews/:id/supervisors": "officer",
  "PATCH /crews/:id/supervisors/:spanId": "officer",
  "POST /evaluate": everybody,
  "GET /instruments": "officer supervisor auditor",
  "POST /instruments": "officer",
  "PUT /instruments/:id": "officer",
  "GET /jobs": "officer supervisor auditor",
  "POST /jobs": "officer",
  "PUT /jobs/:id": "officer",
  "PUT /me/settings": everybody,
  "GET /protectors": "officer supervisor auditor",
  "POST /protectors": "officer",
  "GET /protectors/:id": "officer supervisor auditor",
  "GET /protectors/:id/at-ear": "officer supervisor auditor",
  "PUT /protectors/:id": "officer",
  "POST /protectors/:id/revisions": "officer",
  "GET /protectors/:id/files": "officer supervisor auditor",
  "POST /protectors/:id/files": "officer",
  "POST /protectors/:id/files/:attachmentId/removal": "officer",
  "GET /protector-combinations": "officer supervisor auditor",
  "POST /protector-combinations": "officer",
  "POST /protector-combinations/preview": "officer",
  "GET /rule-sets": everybody,
  "GET /search": "officer supervisor auditor",
  "GET /session": "public",
  "GET /sites": "officer supervisor auditor administrator",
  "POST /sites": "administrator",
  "GET /sites/:id": "officer supervisor auditor administrator",
  "PUT /sites/:id": "administrator",
  "POST /sites/:id/settings": "officer",
  "GET /tasks": "officer supervisor auditor",
  "POST /tasks": "officer",
  "GET /tasks/:id": "officer supervisor auditor",
  "PUT /tasks/:id": "officer",
  "POST /tasks/:id/levels": "officer",
  "GET /users": "administrator",
  "POST /users": "administrator",
  "PUT /users/:id": "administrator",
  "POST /users/:id/revoke": "administrator",
  "GET /worker-names": "officer administrator",
  "GET /workers": "officer supervisor auditor",
  "POST /workers": "officer",
  "GET /workers/:id": "officer supervisor worker auditor",
  "PUT /workers/:id": "officer",
  "GET /workers/:id/assignments": "officer supervisor worker auditor",
  "POST /workers/:id/assignments": "officer",
  "POST /workers/:id/sign-in-codes": "officer administrator",
  "GET /exports/gap-names": "officer auditor",
  "GET /exports/gaps": "officer auditor",
  "GET /exports/year-dictionary.csv": "officer auditor",
  "GET /exports/year.csv": "officer auditor",
  "POST /imports/past-results": "officer",
  "GET /imports/past-results/template.csv": "officer",
  "POST /imports/readings": "officer",
  "GET /imports/readings/template.csv": "officer",
  "POST /imports/shifts": "officer",
  "GET /imports/shifts/template.csv": "officer",
  "POST /protectors/:id/revisions/preview": "officer",
  "GET /recompute-progress": "officer",
  "POST /sites/:id/settings/preview": "officer",
  "POST /tasks/:id/levels/preview": "officer",
  "GET /files/:id": "officer supervisor worker auditor",
  "POST /files": "officer",
  "GET /instruments/:id/calibrations": "officer auditor",
  "POST /instruments/:id/calibrations": "officer",
  "GET /sites/:id/outings": "officer auditor",
  "POST /outings": "officer",
  "POST /runs/:id/back": "officer",
  "POST /runs/:id/undo-out": "officer",
  "POST /samples": "officer",
  "GET /groups/:id": "officer auditor",
  "GET /measuring-needs": "officer auditor",
  "PUT /sites/:id/remeasuring": "officer",
  "GET /survey-plan": "officer",
  "GET /surveys": "officer auditor",
  "POST /surveys": "officer",
  "GET /surveys/:id": "officer auditor",
  "PUT /surveys/:id": "officer",
  "POST /surveys/:id/adoption": "officer",
  "POST /surveys/:id/adoption/preview": "officer",
  "POST /surveys/:id/state": "officer",
  "GET /stock": "officer auditor",
  "GET /stock/moves": "officer auditor",
  "GET /stock/replacements": "officer auditor",
  "POST /stock/moves": "officer",
  "POST /issues/:id/replacements": "officer",
  "GET /wearing-crews": "officer supervisor",
  "GET /crews/:id/wearing-tally": "officer supervisor",
  "GET /wearing-rounds": "officer supervisor auditor",
  "POST /wearing-rounds": "officer supervisor worker",
  "POST /wearing-rounds/:id/strike": "officer",
  "GET /warning-signals": "officer supervisor auditor",
  "GET /warning-signals/:id": "officer supervisor auditor",
  "POST /warning-signals": "officer",
  "PUT /warning-signals/:id": "officer",
  "GET /workplace-changes": "officer auditor",
  "POST /workplace-changes": "officer",
  "GET /workplace-changes/:id/protectors": "officer auditor",
  "POST /workplace-changes/:id/protectors": "officer",
  "POST /workplace-changes/:id/strike": "officer",
  "GET /histories/:id": "officer auditor",
  "GET /histories/:id/analysis": "officer auditor",
  "GET /histories/:id/envelope": "officer auditor",
  "GET /histories/:id/levels.csv": "officer auditor",
  "PUT /histories/:id/stretches": "officer",
  "GET /history-imports": "officer auditor",
  "GET /history-imports/:id": "officer auditor",
  "POST /history-imports": "officer",
  "POST /history-imports/:id/cancel": "officer",
  "POST /history-imports/:id/read": "officer",
  "POST /history-imports/:id/store": "officer",
  "GET /recordings": "officer auditor",
  "GET /recordings/:id": "officer auditor",
  "POST /recordings": "officer",
  "POST /recordings/tones": "officer",
  "POST /recordings/:id/adoption": "officer",
  "POST /recordings/:id/adoption/preview": "officer",
  "POST /recordings/:id/audio-deletion": "officer",
  "POST /recordings/:id/cancel": "officer",
  "POST /recordings/:id/faults": "officer",
  "POST /recordings/:id/keeping": "officer",
  "GET /microphone-checks/:id": "officer auditor",
  "GET /workers/:id/microphone-checks": "officer auditor",
  "POST /microphone-checks/:id/cancel": "officer",
  "POST /microphone-checks/:id/keep": "officer",
  "POST /microphone-checks/:id/swap": "officer",
  "POST /workers/:id/microphone-checks": "officer",
  "POST /workers/:id/microphone-checks/typed": "officer",
};

testApp();
const nameOf = (route: (typeof routes)[number]) => `${route.method.toUpperCase()} ${route.path}`;

test("every route has its row, and every row its route", () => {
  expect(Object.keys(matrix).toSorted()).toEqual(routes.map(nameOf).toSorted());
});

test("public are the ways in, and nothing else", () => {
  const open = routes.filter(({ spec }) => spec.may === "public").map(nameOf);
  expect(open.toSorted()).toEqual(
    Object.keys(matrix)
      .filter((name) => matrix[name] === "public")
      .toSorted(),
  );
});

describe("role × route", () => {
  const clients = new Map<Role, Client>();

  beforeAll(async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    for (const role of ROLES) {
      const workerId = role === "worker" ? worker.id : undefined;
      clients.set(
        role,
        await signInAs(
          await buildUser({ organizationId: site.organizationId, roles: [role], workerId }),
        ),
      );
    }
  });

  const rows = Object.entries(matrix).filter(([, allowed]) => allowed !== "public");
  test.each(rows)("%s: %s", async (name, allowed) => {
    const [method = "", path = ""] = name.split(" ");
    const nobodys = path
      .replace(/:date/g, "2026-01-01")
      .replace(/:\w+/g, () => crypto.randomUUID());
    const outcomes = await Promise.all(
      ROLES.map(async (role) => {
        // An empty request about nothing: let in, it is refused for what it lacks, or finds nothing.
        const { status } = await clients
          .get(role)!
          .send({ method: method.toLowerCase() as Call["method"], path: nobodys, revision: 1 });
        expect(status).not.toBe(401);
        expect(status).toBeLessThan(500);
        return status === 403 ? [] : [role];
      }),
    );
    const inOrder = (roles: string) => ROLES.filter((role) => roles.split(" ").includes(role));
    expect(outcomes.flat()).toEqual(inOrder(allowed));
  });
});
