import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import type { VisitorView } from "../../shared/schemas/visitor";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { peopleQueries } from "../features/people/queries";
import { VisitorForm } from "../features/people/visitor-form";
import { VisitorsTable } from "../features/people/visitors-table";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { untilText } from "../lib/until-text";
import { paths } from "../paths";
import "../styles/people.css";

/** Somebody from outside reads one year of one site for a while. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { sites } = useUser();
  const visitors = useQuery(peopleQueries.visitors);
  const [letIn, setLetIn] = useState<VisitorView | null>(null);
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.people}>{i18n.t("People")}</TextLink>}
          title={i18n.t("Visitors")}
          lead={i18n.t(
            "A visitor reads one year of one site and changes nothing. Access ends by itself.",
          )}
        />
        <Section title={i18n.t("Let a visitor in")} id="let-in">
          <VisitorForm sites={sites} onLetIn={setLetIn} />
          <p className="mt-3">
            <Status>
              {letIn &&
                i18n.t("{name} may read {site}, {year}. Access ends: {time} ({zone}).", {
                  name: letIn.name,
                  site: letIn.siteName,
                  year: String(letIn.year),
                  time: untilText(i18n, letIn.endsAt, letIn.timeZone, locale),
                  zone: letIn.timeZone,
                })}
            </Status>
          </p>
        </Section>
        <Section title={i18n.t("Who is let in")} id="visitors">
          <VisitorsTable
            visitors={visitors.data ?? []}
            state={visitors.isPending ? "loading" : visitors.isError ? "failed" : "ready"}
            error={visitors.error}
            onRetry={() => void visitors.refetch()}
          />
        </Section>
      </PageBody>
      <Folio caution={i18n.t("Letting somebody in, and ending it, are events in the trail.")}>
        <TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>
      </Folio>
    </>
  );
}
