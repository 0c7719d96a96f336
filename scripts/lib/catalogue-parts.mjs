/**
 * The words of a language are one file, shared/i18n/<language>.po. They are compiled in parts, so that a page loads the ones it
 * needs (see shared/i18n/index.ts, src/router.tsx and src/routes/desk-pages.tsx): `base` is everybody's and all that a worker's
 * phone gets. A page whose part is not loaded would show untranslated text.
 */
const pages = (...names) => names.map((name) => `src/routes/${name}.tsx`);
const features = (...names) => names.map((name) => `src/features/${name}/**`);

/** Shared parts that no page of a worker shows: their words go with those of the rules, which every other page loads. */
const beyondWorkers = [
  "band-fields",
  "change-preview",
  "combobox-field",
  "conflict-dialog",
  "data-table",
  "day-figures",
  "drop-strip",
  "file-input",
  "finding-due",
  "finding-words",
  "gear-field",
  "meter-settings",
  "notice-line",
  "record-form",
  "reviewed-change",
  "slips-link",
  "spectrum-chart",
  "spectrum-field",
]
  .map((name) => `src/components/${name}.tsx`)
  .concat("src/lib/role-word.ts", "src/lib/employer-words.ts");

const included = {
  base: [
    "src/components/**",
    "src/lib/**",
    "src/router.tsx",
    ...features("session", "me"),
    "src/features/training/worker-training.tsx",
    ...pages(
      "loading",
      "me-page",
      "sign-in",
      "signed-in",
      "signed-out",
      "no-access",
      "acknowledge-page",
      "not-found",
      "route-error",
    ),
    "shared/findings/**",
    "shared/format/**",
    "shared/problems/**",
    "shared/day/**",
  ],
  people: [
    ...features(
      "crew-sheet",
      "year-file",
      "trail",
      "people",
      "sites-admin",
      "access",
      "tokens",
      "mails",
      "site-figures",
      "employer-shares",
    ),
    ...pages(
      "crew-sheet-page",
      "crew-people-page",
      "hand-over-page",
      "year-file-page",
      "draw-page",
      "trail-page",
      "trail-check-page",
      "trail-head-page",
      "retention-page",
      "people-page",
      "person-page",
      "visitors-page",
      "employer-shares-page",
      "shared-results-page",
      "groups-page",
      "account-page",
      "reads-page",
      "record-access-page",
      "sites-page",
      "site-form-page",
      "site-figures-page",
    ),
  ],
  office: [
    ...features(
      "waiting",
      "findings",
      "workers",
      "results",
      "runs",
      "notices",
      "letters",
      "training",
      "duties",
      "assignments",
      "fits",
      "microphone-check",
    ),
    ...pages(
      "waiting-page",
      "employers-page",
      "finding*-page",
      "letter*-page",
      "worker*-page",
      "training*-page",
      "duties-page",
      "result-page",
      "shift-page",
      "run*-page",
      "microphone-*-page",
    ),
  ],
  rules: ["shared/acoustics/**", "shared/rule-sets/**", "shared/words/**", ...beyondWorkers],
  day: [...features("day-entry"), ...pages("day*-page")],
  register: [
    ...features("at-ear", "signals", "planning"),
    ...features("protectors", "rules", "areas", "tasks", "jobs", "crews", "instruments", "imports"),
    ...features("wearing", "stock", "choosing"),
    ...pages(
      "protector*",
      "fit*-page",
      "wearing*-page",
      "stock-page",
      "choose-page",
      "plan*-page",
      "try-changes-page",
      "zone-sign-page",
      "rules-page",
      "site-rules-page",
      "areas-page",
      "task*-page",
      "jobs-page",
    ),
    ...pages(
      "crew-page",
      "crews-page",
      "instruments-page",
      "import-page",
      "import-roster-page",
      "register-frame",
    ),
  ],
  measuring: [
    "shared/recordings/**",
    "shared/surveys/**",
    ...features("surveys", "outings", "histories", "recordings", "groups"),
    ...pages(
      "to-measure-page",
      "workplace-changes-page",
      "survey*-page",
      "sample-page",
      "out-and-back-page",
      "histor*-page",
      "recording*-page",
      "group-page",
      "instrument-page",
      "measuring-frame",
    ),
  ],
  // Documents of the office; a worker's own is among the mail's words.
  reports: [
    "server/reports/field-sheet.ts",
    "server/reports/survey-report.ts",
    "server/reports/year-report.ts",
  ],
  mail: ["server/**"],
};

const toPattern = (glob) =>
  new RegExp(
    `^${glob.replace(/[.]/g, "\\.").replace(/\*\*/g, "§").replace(/\*/g, "[^/]*").replace(/§/g, ".*")}$`,
  );
const patterns = Object.entries(included).map(([part, globs]) => ({
  part,
  globs: globs.map(toPattern),
  without: part === "base" ? beyondWorkers : [],
}));

/** Names of the parts, the base first. */
export const cataloguePartNames = Object.keys(included);

/** The part that takes a source file's words, the first that names it; a path from the project's folder. */
export const partOfSource = (path) =>
  patterns.find(
    ({ globs, without }) => !without.includes(path) && globs.some((pattern) => pattern.test(path)),
  )?.part;

/** Texts that the catalogue translates, as they stand in a source: `i18n.t("…")`. */
export function textsInSource(source) {
  return [
    ...source.matchAll(/(?:i18n\.(?:t|_)\(\s*|\/\*\s*i18n\s*\*\/\s*)("(?:[^"\\]|\\.)*")/g),
  ].map(([, text]) => JSON.parse(text));
}
