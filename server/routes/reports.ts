import { SlipsPdfQuery } from "../../shared/schemas/choice";
import { IdParams } from "../../shared/schemas/common";
import {
  ExposureRecordQuery,
  YearReportFilter,
  YearReportInput,
  YearReportPage,
  YearReportRow,
} from "../../shared/schemas/report";
import { issueYearReport } from "../commands/issue-year-report";
import { recordRead } from "../commands/record-read";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { Survey } from "../models/survey";
import { Worker } from "../models/worker";
import { exposureRecordPolicy, may, sitePolicy, surveyPolicy, yearReportPolicy } from "../policies";
import { findWorkerDetail } from "../queries/workers";
import { findYearReport, issuedFigures, listYearReports } from "../queries/year-reports";
import { exposureRecord } from "../reports/exposure-record";
import { fieldSheet } from "../reports/field-sheet";
import { issueSlipsReport } from "../reports/issue-slips";
import { answerPdf, plainName } from "../reports/pdf";
import { surveyReport } from "../reports/survey-report";
import { yearReport } from "../reports/year-report";

export function defineReportRoutes(): void {
  endpoint.get(
    "/workers/:id/exposure-record.pdf",
    {
      summary: "Everything on record of a worker, to print",
      may: may.readExposureRecord,
      params: IdParams,
      query: ExposureRecordQuery,
      streams: true,
    },
    ({ actor, params, query, response }) =>
      answerPdf(actor, response, async () => {
        const worker = await findVisible(Worker, exposureRecordPolicy, params.id, actor);
        const detail = only(await findWorkerDetail(actor, worker.id));
        await recordRead(actor, worker.id, "history");
        return {
          report: await exposureRecord(actor, detail, query.language),
          name: plainName("exposure-record", detail.employeeNumber),
        };
      }),
  );

  endpoint.get(
    "/surveys/:id/report.pdf",
    {
      summary: "A survey with what the standard asks of its report, to print",
      may: may.readMeasuring,
      params: IdParams,
      streams: true,
    },
    ({ actor, params, response }) =>
      answerPdf(actor, response, async () => {
        const survey = await findVisible(Survey, surveyPolicy, params.id, actor);
        return {
          report: await surveyReport(actor, survey.id),
          name: plainName("survey", survey.name),
        };
      }),
  );

  endpoint.get(
    "/surveys/:id/field-sheet.pdf",
    {
      summary: "Sheets to carry along for a survey, one for each task or worker, to print",
      may: may.readMeasuring,
      params: IdParams,
      streams: true,
    },
    ({ actor, params, response }) =>
      answerPdf(actor, response, async () => {
        const survey = await findVisible(Survey, surveyPolicy, params.id, actor);
        return {
          report: await fieldSheet(actor, survey.id),
          name: plainName("field-sheet", survey.name),
        };
      }),
  );

  endpoint.get(
    "/issue-slips.pdf",
    {
      summary: "What each of these workers has to wear where, to be printed and signed",
      may: may.readFitting,
      query: SlipsPdfQuery,
      streams: true,
    },
    ({ actor, query, response }) =>
      answerPdf(actor, response, async () => ({
        report: await issueSlipsReport(actor, query.workerIds, query.language),
        name: "issue-slips",
      })),
  );

  endpoint.get(
    "/year-reports",
    {
      summary: "Reports issued of a site's year, the latest first",
      may: may.readYearReports,
      query: YearReportFilter,
      reply: YearReportPage,
    },
    async ({ actor, query }) => {
      await findVisible(Site, sitePolicy, query.siteId, actor);
      return listYearReports(actor, query);
    },
  );

  endpoint.post(
    "/year-reports",
    {
      summary: "Issue a report of a site's year, kept as it is now",
      may: may.officer,
      body: YearReportInput,
      reply: YearReportRow,
    },
    async ({ actor, body }) => {
      // Locked: numbers follow one another.
      const site = await findVisible(Site, sitePolicy, body.siteId, actor, { lock: true });
      authorize(yearReportPolicy, actor, "issue", { siteId: site.id });
      return findYearReport(actor, await issueYearReport(actor, body));
    },
  );

  endpoint.get(
    "/year-reports/:id/report.pdf",
    {
      summary: "An issued report of a site's year, to print, as it was issued",
      may: may.readYearReports,
      params: IdParams,
      streams: true,
    },
    ({ actor, params, response }) =>
      answerPdf(actor, response, async () => {
        const issued = await findYearReport(actor, params.id);
        const kept = await issuedFigures(issued.id);
        return {
          report: await yearReport(actor.language, issued, kept),
          name: plainName(kept.site, String(issued.year), "report", String(issued.number)),
        };
      }),
  );
}
