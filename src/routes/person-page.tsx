import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useNavigate, useParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import type { UserView } from "../../shared/schemas/user";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { EndAccess } from "../features/people/end-access";
import { IssueCode } from "../features/people/issue-code";
import { NewPersonForm, PersonForm } from "../features/people/person-form";
import { peopleQueries } from "../features/people/queries";
import { hasRole, useUser } from "../features/session/session";
import { TokensTable } from "../features/tokens/tokens-table";
import { IfCan } from "../lib/can";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/people.css";
import "../styles/register.css";

/** One person, or a new one. */
export function Component() {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const { id } = useParams();
  const user = useUser();
  const isNew = id === "new";
  const people = useQuery({ ...peopleQueries.list, enabled: !isNew });
  const sites = useQuery(peopleQueries.sites);
  const person = people.data?.find((one) => one.id === id) ?? null;
  const timeZone = user.sites[0]?.timeZone ?? "UTC";
  const back = () => navigate(paths.people);
  const way = <TextLink to={paths.people}>{i18n.t("People")}</TextLink>;
  const error = (isNew ? null : people.error) ?? sites.error;

  if (error)
    return (
      <PageBody>
        <PageHead way={way} title={i18n.t("Person")} />
        <Failed
          error={error}
          onRetry={() => {
            void people.refetch();
            void sites.refetch();
          }}
        />
      </PageBody>
    );
  if (isNew)
    return (
      <PageBody>
        <PageHead
          way={way}
          title={i18n.t("New person")}
          lead={i18n.t("The first sign-in binds the person to the sign-in service’s identity.")}
        />
        {sites.data && <NewPersonForm administered={sites.data} onSaved={back} onLeave={back} />}
      </PageBody>
    );
  if (people.data && !person)
    return (
      <PageBody>
        <PageHead way={way} title={i18n.t("Person")} />
        <Empty title={i18n.t("There is nobody at this address.")} />
      </PageBody>
    );
  return (
    <>
      <PageBody
        margin={
          person && (
            <>
              <MarginNote title={i18n.t("Sign-in")}>
                <SignInFacts person={person} timeZone={timeZone} />
              </MarginNote>
              {person.workerId !== null && person.revokedAt === null && (
                <MarginNote title={i18n.t("Code on paper")}>
                  {hasRole(user, "officer") ? (
                    <p>
                      <TextLink to={paths.worker(person.workerId)}>
                        {i18n.t("Issue a code on the worker’s page")}
                      </TextLink>
                    </p>
                  ) : (
                    <IssueCode workerId={person.workerId} timeZone={timeZone} />
                  )}
                </MarginNote>
              )}
            </>
          )
        }
      >
        <PageHead
          way={way}
          title={person?.name ?? <span className="loading-line" />}
          lead={person?.revokedAt ? i18n.t("Access has ended.") : undefined}
          actions={
            person && (
              <IfCan can={person.can} to="revoke">
                <EndAccess person={person} onEnded={back} />
              </IfCan>
            )
          }
        />
        {person && sites.data && (
          <IfCan can={person.can} to="change" otherwise={<Ended person={person} />}>
            <PersonForm
              key={person.revision}
              person={person}
              administered={sites.data}
              onSaved={back}
              onLeave={back}
            />
          </IfCan>
        )}
        {person && (
          <Section title={i18n.t("Tokens for other systems")} id="tokens">
            <TokensTable userId={person.id} timeZone={timeZone} />
          </Section>
        )}
      </PageBody>
      <Folio caution={i18n.t("Granting and ending access are events in the trail.")} />
    </>
  );
}

function SignInFacts({ person, timeZone }: { person: UserView; timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { email, expectedSubject, lastSignInAt, isBound, revokedAt } = person;
  const { sites } = useUser();
  const isOneZone = new Set(sites.map((site) => site.timeZone)).size <= 1;
  const at = (instant: string) => {
    const time = formatInstant(instant, timeZone, locale);
    return isOneZone ? time : i18n.t("{time} ({zone})", { time, zone: timeZone });
  };
  return (
    <>
      <p className="sign-in-name">{email ?? expectedSubject ?? i18n.t("with a code")}</p>
      <Leaders
        items={[
          {
            key: "bound",
            label: i18n.t("Bound to a sign-in"),
            value: (
              <span className="whitespace-nowrap">
                {isBound ? i18n.t("yes") : i18n.t("not yet")}
              </span>
            ),
          },
        ]}
      />
      <p>
        {lastSignInAt
          ? i18n.t("Last sign-in {time}.", { time: at(lastSignInAt) })
          : i18n.t("Has never signed in.")}
      </p>
      {revokedAt && <p>{i18n.t("Access ended {time}.", { time: at(revokedAt) })}</p>}
    </>
  );
}

function Ended({ person }: { person: UserView }) {
  const { i18n } = useLingui();
  return (
    <Empty
      title={
        person.revokedAt
          ? i18n.t("This person may no longer sign in.")
          : i18n.t("You may see this person, but not change them.")
      }
    >
      {person.revokedAt && (
        <TextLink to={paths.person("new")}>{i18n.t("Give access anew")}</TextLink>
      )}
    </Empty>
  );
}
