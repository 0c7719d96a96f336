import { AuditEventFilter, AuditEventPage } from "../../shared/schemas/audit-event";
import { endpoint } from "../lib/endpoint";
import { may } from "../policies";
import { presentAuditEvent } from "../presenters/audit-event";
import { pageOfAuditEvents } from "../queries/audit-events";

export function defineAuditRoutes(): void {
  endpoint.get(
    "/audit-events",
    {
      summary: "Who changed what, and when",
      may: may.readTrail,
      query: AuditEventFilter,
      reply: AuditEventPage,
    },
    async ({ actor, query }) => {
      const { rows, next, names } = await pageOfAuditEvents(actor, query);
      return { rows: rows.map(presentAuditEvent), next, names };
    },
  );
}
