import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { accessQueries } from "../features/access/queries";
import { ReadersTable } from "../features/access/readers-table";
import { ReadsTable } from "../features/access/reads-table";
import { DigestForm } from "../features/crew-sheet/digest-form";
import { MailChoices } from "../features/mails/mail-choices";
import { SentToMe } from "../features/mails/sent-to-me";
import { hasRole, useUser } from "../features/session/session";
import { TokenForm } from "../features/tokens/token-form";
import { TokensTable } from "../features/tokens/tokens-table";
import "../styles/access.css";

/** One's own account: who can see what of oneself, and who did. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const access = useQuery(accessQueries.own);
  const isWorker = user.workerId !== null;
  const table = { error: access.error, onRetry: () => void access.refetch() };
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("My account")}
          lead={user.email === null ? user.name : `${user.name}, ${user.email}`}
        />
        {isWorker && (
          <Section title={i18n.t("Who can see my record")} id="record">
            <ReadersTable
              {...table}
              caption={i18n.t("Who can see my record")}
              readers={access.data ? (access.data.record ?? []) : undefined}
              of="record"
            />
          </Section>
        )}
        {isWorker && hasRole(user, "worker") && (
          <Section title={i18n.t("Who has read my record")} id="reads">
            <ReadsTable isOwn />
          </Section>
        )}
        <Section title={i18n.t("Who can see my account")} id="account">
          <ReadersTable
            {...table}
            caption={i18n.t("Who can see my account")}
            readers={access.data?.account}
            of="account"
          />
        </Section>
        {hasRole(user, "officer", "supervisor", "worker") && (
          <>
            <Section title={i18n.t("Sent to me")} id="sent">
              <SentToMe timeZone={user.sites[0]?.timeZone ?? "UTC"} />
            </Section>
            <Section title={i18n.t("Mails that come to me")} id="mails">
              <MailChoices />
            </Section>
          </>
        )}
        {hasRole(user, "officer", "supervisor") && (
          <Section title={i18n.t("Daily mail")} id="digest">
            <p className="account-note">
              {i18n.t(
                "A mail on each day on which your crews work: who is expected, who is not in, and which orders are open.",
              )}
            </p>
            <DigestForm />
          </Section>
        )}
        {hasRole(user, "officer", "supervisor", "worker", "auditor", "administrator") && (
          <Section title={i18n.t("Tokens for other systems")} id="tokens">
            <p className="account-note">
              {i18n.t(
                "With a token another system acts as you, within what you choose here and no further than your roles. Whoever has it can do the same.",
              )}
            </p>
            <TokensTable userId={user.id} timeZone={user.sites[0]?.timeZone ?? "UTC"} />
            <h3 className="account-new">{i18n.t("New token")}</h3>
            <TokenForm />
          </Section>
        )}
      </PageBody>
      <Folio
        caution={i18n.t(
          "Each day on which somebody opens a part of a record stands here once. Reading one’s own leaves no entry.",
        )}
      />
    </>
  );
}
