/**
 * Takes the pictures of README from a running demo: `npm start` in one terminal, `npm run pictures` in another.
 * PUBLIC_URL says where it runs unless that is its usual address.
 */
import { mkdirSync } from "node:fs";
import { signInAs, startBrowser } from "../tests/setup/browser";

interface Person {
  name: string;
  roles: string[];
  granted?: boolean;
  note: string;
}

const url = process.env.PUBLIC_URL ?? "http://127.0.0.1:4600";
const issuer = process.env.OIDC_ISSUER ?? "http://localhost:4601";
const folder = "docs/pictures";
mkdirSync(folder, { recursive: true });

const people = (await (await fetch(`${issuer}/demo-people`)).json()) as Person[];
const somebody = (role: string, site = "") => {
  const there = people.filter(({ note }) => note.includes(site));
  const found =
    there.find(({ roles }) => roles.length === 1 && roles[0] === role) ??
    there.find(({ roles }) => roles.includes(role));
  if (!found) throw new Error(`the demo has no ${role}`);
  return found.name;
};

interface Shot {
  file: string;
  role: string;
  /** The site whose reader it is, where the first of the role would not see it. */
  site?: string;
  path: string | ((visit: (path: string) => Promise<unknown>) => Promise<string>);
  width: number;
  height: number;
  colorScheme?: "dark";
}

/** The crew whose day is furthest entered, and the worker first in the list: whatever the demo holds today. */
const dayPath: Shot["path"] = async (ask) => {
  const waiting = (await ask("/waiting")) as {
    crews: { id: string; date: string; saved: number }[];
  };
  const [crew] = waiting.crews.toSorted((a, b) => b.saved - a.saved);
  return `/days/${crew?.id}/${crew?.date}`;
};
const resultPath: Shot["path"] = async (ask) => {
  const { findings } = (await ask("/waiting")) as {
    findings: {
      worker: { id: string } | null;
      figures: { date: string; atEarDb: number | null; uncertaintyDb: number | null } | null;
    }[];
  };
  const found = findings.find(
    ({ worker, figures }) =>
      worker && figures?.atEarDb && figures.uncertaintyDb && figures.atEarDb < 90,
  );
  return `/workers/${found?.worker?.id}/days/${found?.figures?.date}`;
};

/** The survey that is under way, and its group. */
const surveyUnderWay = async (ask: (path: string) => Promise<unknown>) => {
  const { rows } = (await ask("/surveys?state=measuring&limit=10")) as {
    rows: { id: string; jobId: string; strategy: string }[];
  };
  return rows.find(({ strategy }) => strategy === "task") ?? rows[0];
};
const surveyPath: Shot["path"] = async (ask) =>
  `/measuring/surveys/${(await surveyUnderWay(ask))?.id}`;
const groupPath: Shot["path"] = async (ask) =>
  `/measuring/groups/${(await surveyUnderWay(ask))?.jobId}`;
/** A history with a stretch left out, and a bracket for each sample: one of that survey's runs. */
const historyPath: Shot["path"] = async (ask) => {
  const survey = await surveyUnderWay(ask);
  const { rows } = (await ask(`/runs?surveyId=${survey?.id}&limit=50`)) as {
    rows: { historyId: string | null; taskId: string | null }[];
  };
  const run = rows.find(({ historyId, taskId }) => historyId !== null && taskId === null);
  return `/measuring/histories/${run?.historyId}`;
};

/** The id of the first row of a list that is asked for by its address. */
const first =
  (address: string, to: (id: string) => string): Shot["path"] =>
  async (ask) => {
    const { rows } = (await ask(address)) as { rows: { id: string }[] };
    return to(rows[0]?.id ?? "");
  };
/** The finding that was followed furthest: closed, with exposure before and after. */
const findingPath = first(
  "/findings?state=closed&kind=over-limit-at-ear&limit=1",
  (id) => `/findings/${id}`,
);
/** Somebody whose protector takes too little. */
const fittingPath: Shot["path"] = async (ask) => {
  const { rows } = (await ask("/findings?kind=protects-too-little&limit=10")) as {
    rows: { worker: { id: string } | null }[];
  };
  return `/protectors/fitting/${rows.find(({ worker }) => worker !== null)?.worker?.id}`;
};
const timetablePath: Shot["path"] = async (ask) => {
  const { rows } = (await ask("/plans?state=all&limit=50")) as {
    rows: { id: string; kind: string }[];
  };
  return `/plans/${rows.find(({ kind }) => kind === "timetable")?.id}`;
};
const activePath: Shot["path"] = async (ask) => {
  const { rows } = (await ask("/protectors")) as { rows: { id: string; kind: string }[] };
  return `/protectors/${rows.find(({ kind }) => kind === "active-earmuff")?.id}`;
};
const handOverPath = first("/crews?limit=1", (id) => `/crew-sheet/${id}/hand-over`);

const shots: Shot[] = [
  { file: "waiting", role: "officer", path: "/waiting", width: 1440, height: 990 },
  {
    file: "waiting-dark",
    role: "officer",
    path: "/waiting",
    width: 1440,
    height: 990,
    colorScheme: "dark",
  },
  { file: "day-entry", role: "officer", path: dayPath, width: 1600, height: 1000 },
  { file: "working", role: "officer", path: resultPath, width: 1280, height: 1770 },
  { file: "to-measure", role: "officer", path: "/measuring", width: 1280, height: 760 },
  { file: "survey", role: "officer", path: surveyPath, width: 1280, height: 1160 },
  {
    file: "out-and-back",
    role: "officer",
    path: "/measuring/out-and-back",
    width: 1280,
    height: 900,
  },
  { file: "time-history", role: "officer", path: historyPath, width: 1280, height: 1340 },
  { file: "group", role: "officer", path: groupPath, width: 1280, height: 1300 },
  { file: "finding", role: "officer", path: findingPath, width: 1280, height: 1500 },
  { file: "due", role: "officer", path: "/due", width: 1280, height: 900 },
  { file: "fitting", role: "officer", path: fittingPath, width: 1280, height: 1300 },
  { file: "active-muff", role: "officer", path: activePath, width: 1280, height: 1400 },
  {
    file: "timetable",
    role: "officer",
    site: "Kettle Bend",
    path: timetablePath,
    width: 1280,
    height: 1300,
  },
  { file: "hand-over", role: "supervisor", path: handOverPath, width: 400, height: 860 },
  { file: "crew-sheet", role: "supervisor", path: "/crew-sheet", width: 400, height: 860 },
  { file: "my-page", role: "worker", path: "/me", width: 390, height: 844 },
  { file: "year-file", role: "auditor", path: "/year-file", width: 1280, height: 960 },
  { file: "trail-check", role: "auditor", path: "/trail/check", width: 1280, height: 800 },
  {
    file: "retention",
    role: "administrator",
    path: "/people/retention",
    width: 1280,
    height: 900,
  },
  { file: "people", role: "administrator", path: "/people", width: 1280, height: 800 },
  {
    file: "site-figures",
    role: "representative",
    path: "/site-figures",
    width: 1280,
    height: 1000,
  },
  { file: "shared-results", role: "employer", path: "/shared-results", width: 1280, height: 800 },
];

const browser = await startBrowser();
try {
  for (const { file, role, site, path, width, height, colorScheme } of shots) {
    const { page, problems } = await browser.openPage({
      viewport: { width, height },
      colorScheme,
      deviceScaleFactor: width < 500 ? 2 : 1,
    });
    await signInAs(page, url, somebody(role, site));
    const ask = (address: string) =>
      page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), address);
    await page.goto(`${url}${typeof path === "string" ? path : await path(ask)}`);
    await page.waitForLoadState("networkidle");
    await page.screenshot({ path: `${folder}/${file}.png` });
    await page.context().close();
    if (problems.length > 0) throw new Error(`${file}: ${problems.join("\n")}`);
    console.log(`${folder}/${file}.png`);
  }
} finally {
  await browser.close();
}
