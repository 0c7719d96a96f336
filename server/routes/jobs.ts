import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import { JobInput, JobList, JobView } from "../../shared/schemas/task";
import { changeJob } from "../commands/change-job";
import { createJob } from "../commands/create-job";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { Job } from "../models/task";
import { may, programmePolicy, sitePolicy } from "../policies";
import { presentJob } from "../presenters/job";
import { listJobs } from "../queries/jobs";

const view = async (actor: Actor, id: string) =>
  presentJob(actor, only(await listJobs(actor, { id })));

export function defineJobRoutes(): void {
  endpoint.get(
    "/jobs",
    {
      summary: "Jobs with their nominal day",
      may: may.readProgramme,
      query: AtSiteQuery,
      reply: JobList,
    },
    async ({ actor, query }) => ({
      rows: (await listJobs(actor, query)).map((job) => presentJob(actor, job)),
    }),
  );

  endpoint.post(
    "/jobs",
    { summary: "Add a job", may: may.officer, body: JobInput, reply: JobView },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(programmePolicy, actor, "change", { siteId: site.id });
      const job = await createJob(actor, body);
      return view(actor, job.id);
    },
  );

  endpoint.put(
    "/jobs/:id",
    {
      summary: "Change a job; its nominal day is replaced as a whole",
      may: may.officer,
      params: IdParams,
      body: JobInput,
      reply: JobView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const job = await findVisible(Job, programmePolicy, params.id, actor, { lock: true });
      authorize(programmePolicy, actor, "change", job);
      const before = await view(actor, job.id);
      await requireRevision(job, ifMatch, async () => before);
      await changeJob(actor, job, before, body);
      return view(actor, job.id);
    },
  );
}
