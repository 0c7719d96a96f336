import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatDay, formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import { isolate } from "../../shared/i18n/isolate";
import type { HeadMail } from "../../shared/schemas/trail-keeper";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { headMailWord } from "../features/trail/check-words";
import { KeeperForm } from "../features/trail/keeper-form";
import { keeperQuery } from "../features/trail/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/trail.css";

/** Who outside gets the trail's head every week, and which heads went there. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data, error, isPending, refetch } = useQuery(keeperQuery);
  const [said, setSaid] = useState("");
  const zone = data?.keeper?.timeZone ?? data?.timeZones[0] ?? "UTC";
  const columns: DataColumn<HeadMail>[] = [
    {
      id: "week",
      head: i18n.t("Week from"),
      isRowHead: true,
      cell: ({ week }) => formatDay(week, locale),
    },
    {
      id: "to",
      head: i18n.t("Sent to"),
      cell: ({ name, email }) => (
        <>
          <bdi>{name}</bdi>
          <span className="trail-address">{email}</span>
        </>
      ),
    },
    {
      id: "seal",
      head: i18n.t("Seal"),
      cell: ({ seal }) =>
        seal && (
          <>
            {formatNumber(seal.number, 0, locale)}
            <span className="mono trail-hash">{seal.hash}</span>
          </>
        ),
    },
    {
      id: "state",
      head: i18n.t("State"),
      cell: ({ state, sentAt, error: why }) => (
        <>
          {headMailWord(i18n, state)}
          {sentAt && ` ${formatInstant(sentAt, zone, locale)}`}
          {why && <span className="trail-address">{why}</span>}
        </>
      ),
    },
  ];
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("To compare")}>
            <p>
              {i18n.t(
                "The mail names a seal and its hash. This prints the seal of that number as it stands here; another hash means that the trail was rewritten.",
              )}
            </p>
            <p className="mono trail-key">npm run verify:trail -- --seal=1234</p>
          </MarginNote>
        }
      >
        <PageHead
          way={<TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>}
          title={i18n.t("The head outside")}
          lead={i18n.t(
            "Whoever rewrites the whole trail leaves no fault in it. Somebody outside who gets its head every week can tell.",
          )}
        />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
        {data && (
          <Section id="keeper" title={i18n.t("Who keeps the head")}>
            <p className="mb-3">
              {data.keeper
                ? i18n.t("{name}, {email}, on Mondays at 07:00 ({zone}).", {
                    name: isolate(data.keeper.name),
                    email: isolate(data.keeper.email),
                    zone: data.keeper.timeZone,
                  })
                : i18n.t("Nobody yet.")}
            </p>
            {data.can.change && (
              <KeeperForm
                key={data.revision}
                view={data}
                onSaved={({ keeper }) =>
                  setSaid(
                    keeper
                      ? i18n.t("Saved. The next head goes to {name}.", {
                          name: isolate(keeper.name),
                        })
                      : i18n.t("Saved. No head goes out."),
                  )
                }
              />
            )}
            <p className="mt-3">
              <Status>{said}</Status>
            </p>
          </Section>
        )}
        <Section id="mails" title={i18n.t("Heads that went out")}>
          <DataTable
            caption={i18n.t("Heads that went out")}
            columns={columns}
            rows={data?.mails ?? []}
            rowKey={({ id }) => id}
            state={isPending ? "loading" : error ? "failed" : "ready"}
            error={error}
            onRetry={() => void refetch()}
            empty={<Empty title={i18n.t("None went out yet.")} />}
            stacksOnPhone
          />
        </Section>
      </PageBody>
      <Folio
        caution={i18n.t(
          "Naming somebody else is an event in the trail, and whoever kept the head until then is told.",
        )}
      />
    </>
  );
}
