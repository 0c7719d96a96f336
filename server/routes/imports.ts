import { stringify } from "csv-stringify/sync";
import {
  IMPORT_KINDS,
  IMPORT_LIMIT_BYTES,
  ImportForm,
  ImportQuery,
  ImportReport,
} from "../../shared/schemas/import";
import { importFile } from "../commands/import-file";
import { IMPORT_COLUMNS } from "../imports/columns";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { may, programmePolicy, sitePolicy } from "../policies";

/** Shifts, readings and past years' levels from a file: first a dry run, then all of it or nothing. */
export function defineImportRoutes(): void {
  for (const kind of IMPORT_KINDS) {
    endpoint.post(
      `/imports/${kind}`,
      {
        summary: `Import ${kind} from a CSV file`,
        may: may.officer,
        query: ImportQuery,
        body: ImportForm,
        reply: ImportReport,
        upload: { limitBytes: IMPORT_LIMIT_BYTES },
      },
      async ({ actor, query, body, request }) => {
        const site = await findVisible(Site, sitePolicy, query.siteId, actor);
        authorize(programmePolicy, actor, "change", { siteId: site.id });
        return importFile(actor, site, {
          kind,
          isDryRun: query.dryRun === "true",
          form: body,
          bytes: request.file!.buffer,
        });
      },
    );

    endpoint.get(
      `/imports/${kind}/template.csv`,
      { summary: `A file of ${kind} to fill in`, may: may.officer },
      ({ response }) => {
        const columns = IMPORT_COLUMNS[kind];
        const text = stringify(
          [columns.map(({ name }) => name), columns.map(({ example }) => example)],
          { record_delimiter: "\r\n", bom: true },
        );
        response
          .attachment(`${kind}.csv`)
          .type("text/csv; charset=utf-8; header=present")
          .send(text);
      },
    );
  }
}
