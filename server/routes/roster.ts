import { stringify } from "csv-stringify/sync";
import { IMPORT_LIMIT_BYTES, ImportQuery } from "../../shared/schemas/import";
import { RosterForm, RosterReport } from "../../shared/schemas/roster";
import { importRoster } from "../commands/import-roster";
import { ROSTER_COLUMNS } from "../imports/draft-roster";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { may, programmePolicy, sitePolicy } from "../policies";

/** Who joins, moves and leaves, from a file: first a dry run, then all of it or nothing. */
export function defineRosterRoutes(): void {
  endpoint.post(
    "/roster-imports",
    {
      summary: "Import a roster from a CSV file, by employee number",
      may: may.officer,
      query: ImportQuery,
      body: RosterForm,
      reply: RosterReport,
      upload: { limitBytes: IMPORT_LIMIT_BYTES },
    },
    async ({ actor, query, body, request }) => {
      const site = await findVisible(Site, sitePolicy, query.siteId, actor);
      authorize(programmePolicy, actor, "change", { siteId: site.id });
      return importRoster(actor, site, {
        form: body,
        isDryRun: query.dryRun === "true",
        bytes: request.file!.buffer,
      });
    },
  );

  endpoint.get(
    "/roster-imports/template.csv",
    { summary: "A roster to fill in", may: may.officer },
    ({ response }) => {
      const text = stringify(
        [ROSTER_COLUMNS.map(({ name }) => name), ROSTER_COLUMNS.map(({ example }) => example)],
        { record_delimiter: "\r\n", bom: true },
      );
      response.attachment("roster.csv").type("text/csv; charset=utf-8; header=present").send(text);
    },
  );
}
