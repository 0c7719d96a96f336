import { describe, expect, test } from "vitest";
import {
  buildFinding,
  buildSite,
  buildSupervisorOf,
  buildUser,
  buildWorker,
  type Client,
  insert,
  select,
  signInAs,
} from "../factories";

const stepOn = (client: Client, findingId: string, body: object, revision: number) =>
  client.send({ method: "post", path: `/findings/${findingId}/steps`, body, revision });

describe("undo", () => {
  const lay = async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const supervisor = await buildSupervisorOf(site, worker);
    const findingId = await buildFinding({ site, workerId: worker.id, state: "came-back" });
    return { site, worker, supervisor, findingId, client: await signInAs(supervisor) };
  };

  test.each([
    [{ kind: "mark-done", text: "" }, "done"],
    [{ kind: "cannot", text: "No stock left." }, "in-hand"],
  ])("takes %o back to what it was before, as a step of its own", async (step, state) => {
    const { site, client, findingId, supervisor } = await lay();
    const said = await stepOn(client, findingId, step, 1);
    expect(said.body).toMatchObject({ state, revision: 2 });
    const undone = await stepOn(client, findingId, { kind: "undo" }, 2);
    expect(undone.status).toBe(201);
    expect(undone.body).toMatchObject({ state: "came-back", revision: 3, closedOn: null });
    expect(undone.body.steps.at(-2)).toMatchObject({ toState: state });
    expect(undone.body.steps.at(-1)).toMatchObject({
      kind: "undone",
      fromState: state,
      toState: "came-back",
      authorName: supervisor.name,
    });
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 ORDER BY id DESC LIMIT 1",
      [site.organizationId],
    );
    expect(events[0]?.action).toBe("undo-finding");
    // Once undone there is nothing left to undo.
    const again = await stepOn(client, findingId, { kind: "undo" }, 3);
    expect([again.status, again.body.code]).toEqual([409, "too-late-to-undo"]);
  });

  test("is the same person's only, and of what happened last", async () => {
    const { site, client, findingId } = await lay();
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    await stepOn(client, findingId, { kind: "mark-done", text: "" }, 1);
    const other = await stepOn(officer, findingId, { kind: "undo" }, 2);
    expect([other.status, other.body.code]).toEqual([409, "too-late-to-undo"]);
    await stepOn(officer, findingId, { kind: "close", text: "Seen to." }, 2);
    const stale = await stepOn(client, findingId, { kind: "undo" }, 2);
    expect(stale.status).toBe(412);
    const closed = await stepOn(client, findingId, { kind: "undo" }, 3);
    expect([closed.status, closed.body.code]).toEqual([409, "too-late-to-undo"]);
    const reopened = await stepOn(officer, findingId, { kind: "undo" }, 3);
    expect([reopened.status, reopened.body.code]).toEqual([409, "too-late-to-undo"]);
  });

  test("is for moments: after a minute the word stands", async () => {
    const { site, client, supervisor, worker } = await lay();
    const findingId = await buildFinding({ site, workerId: worker.id, kind: "fit", state: "done" });
    await insert("finding_steps", {
      organizationId: site.organizationId,
      findingId,
      kind: "marked-done",
      fromState: "new",
      toState: "done",
      authorId: supervisor.id,
      createdAt: new Date(Date.now() - 61_000),
    });
    const late = await stepOn(client, findingId, { kind: "undo" }, 1);
    expect([late.status, late.body.code]).toEqual([409, "too-late-to-undo"]);
    expect(late.body.detail).toContain("too late");
  });
});
