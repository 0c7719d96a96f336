import { execFile } from "node:child_process";
import { promisify } from "node:util";
import { expect, test } from "vitest";
import { select } from "../factories";
import { projectFolder } from "../setup/processes";

interface Outcome {
  code: number;
  stdout: string;
  stderr: string;
}

const setUp = (flags: Record<string, string>): Promise<Outcome> =>
  promisify(execFile)(
    process.execPath,
    [
      "--import",
      "tsx",
      "server/setup.ts",
      ...Object.entries(flags).flatMap(([name, value]) => [`--${name}`, value]),
    ],
    { cwd: projectFolder },
  ).then(
    (done) => ({ code: 0, ...done }),
    (error: Outcome) => error,
  );

const flags = {
  organization: "Ostmere Engines",
  site: "Ostmere works",
  "time-zone": "Europe/London",
  "rule-set": "uk-2005",
  administrator: "I. Brandt",
  email: "i.brandt@ostmere.example",
};

test("lays out organization, site and administrator once, and leaves what is there alone", async () => {
  const outcome = await setUp(flags);
  expect(outcome).toMatchObject({ code: 0, stderr: "" });
  const laidOut = () =>
    select(
      `SELECT o.name AS organization, s.name AS site, t.governing_rule_set AS rules, u.email, g.role, g.site_id FROM organizations o JOIN sites s ON s.organization_id = o.id
     JOIN site_settings t ON t.site_id = s.id JOIN users u ON u.organization_id = o.id JOIN role_grants g ON g.user_id = u.id WHERE o.name = $1`,
      [flags.organization],
    );
  const first = await laidOut();
  expect(first).toEqual([
    {
      organization: "Ostmere Engines",
      site: "Ostmere works",
      rules: "uk-2005",
      email: "i.brandt@ostmere.example",
      role: "administrator",
      site_id: null,
    },
  ]);
  const events = await select<{ action: string }>(
    "SELECT e.action FROM audit_events e JOIN organizations o ON o.id = e.organization_id WHERE o.name = $1 ORDER BY e.id",
    [flags.organization],
  );
  expect(events.map(({ action }) => action)).toEqual(["create-user", "create-site"]);
  const again = await setUp({ ...flags, email: "other@ostmere.example" });
  expect([again.code, again.stderr]).toEqual([
    1,
    "Setting up failed: the organization Ostmere Engines is there already; nothing was changed\n",
  ]);
  expect(await laidOut()).toEqual(first);
});

test.each([
  [
    { organization: "Eastfold" },
    /--site is .*--time-zone is .*--rule-set is .*uk-2005.*--administrator is .*--email or --subject/s,
  ],
  [
    {
      ...flags,
      organization: "Eastfold",
      email: "b@eastfold.example",
      "time-zone": "Atlantis/Centre",
    },
    /time-zone-unknown/,
  ],
  [
    { ...flags, organization: "Eastfold", email: "b@eastfold.example", "rule-set": "none" },
    /rule-set-not-in-force/,
  ],
  [{ ...flags, organization: "Eastfold", email: "no address" }, /email/],
  [{ ...flags, organization: "Eastfold" }, /granted in another organization/],
])("%j is refused with what is wrong, and nothing is half laid out", async (given, message) => {
  await setUp(flags);
  const outcome = await setUp(given);
  expect(outcome.code).toBe(1);
  expect(outcome.stderr).toMatch(message);
  expect(await select("SELECT 1 FROM organizations WHERE name = 'Eastfold'")).toEqual([]);
});
