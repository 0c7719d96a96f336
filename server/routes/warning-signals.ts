import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import {
  WarningSignalDetail,
  WarningSignalInput,
  WarningSignalList,
} from "../../shared/schemas/warning-signal";
import { changeWarningSignal, createWarningSignal } from "../commands/save-warning-signal";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { WarningSignal } from "../models/shop-floor";
import { Site } from "../models/site";
import { may, signalPolicy, sitePolicy } from "../policies";
import { listWarningSignals, warningSignalDetail } from "../queries/warning-signals";

export function defineWarningSignalRoutes(): void {
  endpoint.get(
    "/warning-signals",
    {
      summary: "Signals that must be heard, by site",
      may: may.readProgramme,
      query: AtSiteQuery,
      reply: WarningSignalList,
    },
    async ({ actor, query }) => ({ rows: await listWarningSignals(actor, query) }),
  );

  endpoint.get(
    "/warning-signals/:id",
    {
      summary: "A signal, and whether it is heard in each task under what is worn there",
      may: may.readProgramme,
      params: IdParams,
      reply: WarningSignalDetail,
    },
    async ({ actor, params }) => {
      const found = await findVisible(WarningSignal, signalPolicy, params.id, actor);
      return warningSignalDetail(actor, found.id);
    },
  );

  endpoint.post(
    "/warning-signals",
    {
      summary: "Add a signal",
      may: may.officer,
      body: WarningSignalInput,
      reply: WarningSignalDetail,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(signalPolicy, actor, "change", { siteId: site.id });
      return warningSignalDetail(actor, await createWarningSignal(actor, body));
    },
  );

  endpoint.put(
    "/warning-signals/:id",
    {
      summary: "Change a signal",
      may: may.officer,
      params: IdParams,
      body: WarningSignalInput,
      reply: WarningSignalDetail,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const signal = await findVisible(WarningSignal, signalPolicy, params.id, actor, {
        lock: true,
      });
      authorize(signalPolicy, actor, "change", signal);
      await requireRevision(signal, ifMatch, () => warningSignalDetail(actor, signal.id));
      await changeWarningSignal(actor, signal, body);
      return warningSignalDetail(actor, signal.id);
    },
  );
}
