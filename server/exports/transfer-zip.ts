import { randomBytes } from "node:crypto";
import { PassThrough, type Writable } from "node:stream";
import type { I18n } from "@lingui/core";
import { formatDate } from "../../shared/format/date";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import type { RecordTransferView } from "../../shared/schemas/record-transfer";
import { MANIFEST } from "../../shared/year-file/manifest";
import { row } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { workerPolicy } from "../policies";
import { trailHead } from "../queries/trail-check";
import { readYear } from "./year-snapshot";
import { tableQuery, type YearTable } from "./year-tables";
import { copyRecords, writeYearZip } from "./year-zip";
import { type EntryFacts, ZipStream } from "./zip-stream";

type Transfer = Pick<RecordTransferView, "id" | "siteId" | "siteName" | "successor" | "passesOn">;

interface ListedFile extends EntryFacts {
  path: string;
  /** Of a year's file its year, and the SHA-256 of its own manifest. */
  year: number | null;
  manifestSha256: string | null;
}

/** Who is behind the employee numbers of the years' files. */
function peopleTable(actor: Actor, siteId: string): YearTable {
  const was = ["days", "runs", "fit_tests", "shifts"]
    .map((table) => `w.id IN (SELECT x.worker_id FROM ${table} x WHERE x.site_id = '${siteId}')`)
    .join(" OR ");
  const column = (name: string, sql: string, type: YearTable["columns"][number]["type"]) => ({
    name,
    sql,
    type,
    unit: "",
    meaning: "",
  });
  return {
    name: "people",
    title: "",
    key: ["worker"],
    columns: [
      column("worker", "w.employee_number", "text"),
      column("name", "w.name", "text"),
      column("employer", "w.employer", "code"),
      column("hired_on", "w.hired_on", "date"),
      column("left_on", "w.left_on", "date"),
    ],
    rest: `FROM workers w WHERE (w.site_id = '${siteId}' OR ${was}) AND ${visible(workerPolicy, actor, "w")} ORDER BY w.employee_number`,
  };
}

/** What is in the file and how it is checked, in plain words; line ends as every editor shows them. */
function readMe(
  i18n: I18n,
  locale: Locale,
  organization: string,
  { siteName, successor, passesOn }: Transfer,
  years: readonly string[],
): string {
  const [first] = years;
  return [
    i18n.t("Records of noise and hearing protectors, handed over to a successor"),
    "",
    i18n.t("Site: {site}", { site: siteName }),
    i18n.t("From: {organization}", { organization }),
    i18n.t("To: {successor}", { successor }),
    i18n.t("The site ends or passes on: {date}", { date: formatDate(passesOn, locale) }),
    "",
    i18n.t("What is here"),
    i18n.t("people.csv: who is behind each employee number."),
    ...(first === undefined
      ? [i18n.t("There are no records of any year.")]
      : [
          i18n.t(
            "One ZIP for each year that has records, complete and with employee numbers: {files}.",
            { files: years.join(", ") },
          ),
          i18n.t(
            "In each, csv-metadata.json says what every column means, and check.html checks the file on a computer without a network: open it in a browser and give it the year’s ZIP.",
          ),
        ]),
    i18n.t("manifest.json: every file with its SHA-256."),
    "",
    i18n.t("What the successor does"),
    i18n.t("1. Count the SHA-256 of the whole ZIP as it was received, not of what is in it:"),
    "   Windows: certutil -hashfile FILE SHA256",
    "   macOS: shasum -a 256 FILE",
    "   Linux: sha256sum FILE",
    i18n.t(
      "2. Send it to whoever handed the file over, with the name of who signs and the date. Only then is the handing over done.",
    ),
    i18n.t("3. Keep the records for the rest of the time that the rules ask for."),
    ...(first === undefined
      ? []
      : [
          i18n.t("Who has the program can check each year’s file with: {command}", {
            command: `npm run verify:export ${first}`,
          }),
        ]),
    "",
  ].join("\r\n");
}

/** Adds to a ZIP what is written meanwhile, whichever of the two fails first. */
async function addWritten(
  zip: ZipStream,
  path: string,
  write: (out: Writable) => Promise<void>,
): Promise<EntryFacts> {
  const through = new PassThrough();
  const writing = write(through).then(
    () => void through.end(),
    (error) => {
      through.destroy(error);
      throw error;
    },
  );
  // Packed already.
  const adding = zip.add(path, through, 0).catch((error) => {
    through.destroy();
    throw error;
  });
  const [added, written] = await Promise.allSettled([adding, writing]);
  if (added.status === "rejected") throw added.reason;
  if (written.status === "rejected") throw written.reason;
  return added.value;
}

/**
 * All of a site's records for the employer that follows: an ordinary year's file of each year, who the people are, and a
 * manifest, all of one state of the database and written while it is read. `onYear` hears the SHA-256 of each year's manifest
 * before that year's file is ended.
 *
 * @returns size and SHA-256 of the whole
 */
export function streamTransferZip(
  actor: Actor,
  transfer: Transfer,
  years: readonly number[],
  madeAt: Date,
  out: Writable,
  onYear: (year: number, manifestSha256: string) => Promise<void>,
): Promise<EntryFacts> {
  return readYear(actor.organizationId, async (client) => {
    const site = await row<{
      organization: string;
      site: string;
      timeZone: string;
      language: string;
    }>(
      `SELECT o.name AS organization, s.name AS site, s.time_zone AS "timeZone", s.language FROM sites s JOIN organizations o ON o.id = s.organization_id WHERE s.id = :siteId`,
      { siteId: transfer.siteId },
    );
    const { language, ...facts } = site!;
    const locale = isLocale(language) ? language : "en";
    const zip = new ZipStream(out, madeAt, true);
    const files: ListedFile[] = [];
    const list = (path: string, entry: EntryFacts) =>
      files.push({ path, ...entry, year: null, manifestSha256: null });
    const pathOf = (year: number) => `${year}.zip`;
    const text = readMe(
      await createI18n(locale, ["mail"]),
      locale,
      facts.organization,
      transfer,
      years.map(pathOf),
    );
    list("README.txt", await zip.add("README.txt", [Buffer.from(text)]));
    await copyRecords(client, tableQuery(peopleTable(actor, transfer.siteId)), async (records) => {
      list("people.csv", await zip.add("people.csv", records));
    });
    for (const year of years) {
      let manifestSha256 = "";
      const asked = {
        siteId: transfer.siteId,
        year,
        workers: "number" as const,
        salt: randomBytes(16).toString("hex"),
      };
      const entry = await addWritten(zip, pathOf(year), (inner) =>
        writeYearZip(client, actor, asked, madeAt, inner, async (sha256) => {
          manifestSha256 = sha256;
          await onYear(year, sha256);
        }),
      );
      files.push({ path: pathOf(year), ...entry, year, manifestSha256 });
    }
    const manifest = {
      // Another kind than a year's file, whose check would not know what to make of it.
      format: "site-records-1",
      madeAt: madeAt.toISOString(),
      transferId: transfer.id,
      ...facts,
      successor: transfer.successor,
      passesOn: transfer.passesOn,
      trail: await trailHead(actor.organizationId),
      files,
    };
    await zip.add(MANIFEST, [Buffer.from(`${JSON.stringify(manifest, null, 1)}\n`)]);
    return zip.end();
  });
}
