import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import type { ReactNode } from "react";
import { formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import type { ForeignChange, TrailState } from "../../shared/schemas/trail-check";
import { Button } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { useUser } from "../features/session/session";
import { operationWord, rowFaultWord, sealFaultWord } from "../features/trail/check-words";
import { trailStateQuery } from "../features/trail/queries";
import { actionWord, subjectWord } from "../features/trail/trail-words";
import { type CheckedSoFar, useTrailCheck } from "../features/trail/use-trail-check";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/trail.css";

interface Fault {
  key: string;
  what: string;
  where: ReactNode;
  which: ReactNode;
}

/** Is everything as the trail says? The chain, then every row of every table. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { sites } = useUser();
  const zone = sites[0]?.timeZone ?? "UTC";
  const asked = useQuery(trailStateQuery());
  const { found, error, isRunning, start } = useTrailCheck();
  const state = found?.state ?? asked.data;
  const count = (value: number) => formatNumber(value, 0, locale);

  async function check() {
    const { data } = await asked.refetch();
    if (data) await start(data);
  }

  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("What is checked")}>
              <p>
                {i18n.t(
                  "Each seal is computed again from what it covers and the seal before. Then each row of each table is held against what the trail last recorded of it.",
                )}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("What it can’t tell")}>
              <p>
                {i18n.t(
                  "Whoever rewrites the whole chain leaves it without a fault. Only a head that was kept elsewhere shows that: compare its number and hash with the seal of that number.",
                )}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          title={i18n.t("Check the trail")}
          way={<TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>}
          lead={
            found ? <Verdict found={found} isRunning={isRunning} /> : <WhatItDoes state={state} />
          }
          actions={
            <Button
              kind="primary"
              isBusy={isRunning || asked.isFetching}
              onClick={() => void check()}
            >
              {found?.isDone ? i18n.t("Check again") : i18n.t("Check now")}
            </Button>
          }
        />
        {asked.isError && <Failed error={asked.error} onRetry={() => void asked.refetch()} />}
        {error !== null && (
          <Failed onRetry={() => void check()}>
            {i18n.t("The check broke off. What stands below was checked before that.")}
          </Failed>
        )}
        {found && <Faults found={found} zone={zone} />}
        {state && (state.foreign.length > 0 || state.unwatched.length > 0) && (
          <Foreign state={state} zone={zone} />
        )}
        <Section id="head" title={i18n.t("Head and tail")}>
          <dl className="trail-ends">
            <dt>{i18n.t("Last seal")}</dt>
            <dd>
              {state === undefined ? (
                <span className="loading-line" />
              ) : state.head === null ? (
                i18n.t("There is none yet.")
              ) : (
                <>
                  {i18n.t("number {number}, {at}", {
                    number: count(state.head.number),
                    at: formatInstant(state.head.sealedAt, zone, locale),
                  })}
                  <span className="mono trail-hash">{state.head.hash}</span>
                </>
              )}
            </dd>
            <dt>{i18n.t("Not sealed yet")}</dt>
            <dd>
              {state === undefined ? (
                <span className="loading-line" />
              ) : (
                <Tail state={state} zone={zone} />
              )}
            </dd>
            {state?.stated.map(({ at, rows, roleName }) => (
              <StatedRows
                key={at}
                at={formatInstant(at, zone, locale)}
                rows={rows}
                roleName={roleName}
              />
            ))}
          </dl>
        </Section>
        {found && <Parts found={found} isRunning={isRunning} />}
      </PageBody>
      <Folio caution={i18n.t("The same from the command line: npm run verify:trail")} />
    </>
  );
}

const faultCount = ({ seals, tables, state }: CheckedSoFar) =>
  seals.faults.reduce((sum, { count }) => sum + count, 0) +
  [...tables.values()].reduce((sum, table) => sum + table.faultCount, 0) +
  state.unwatched.length;

/** Before a check. */
function WhatItDoes({ state }: { state: TrailState | undefined }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (!state) return <span className="loading-line" />;
  return i18n.t(
    "Not checked since you opened this page. The check computes {seals} seals anew and holds the rows of {tables} tables against the trail; that can take minutes, and changes nothing.",
    {
      seals: formatNumber(state.head?.number ?? 0, 0, locale),
      tables: formatNumber(state.tables.length, 0, locale),
    },
  );
}

function Verdict({ found, isRunning }: { found: CheckedSoFar; isRunning: boolean }) {
  const { i18n } = useLingui();
  const count = faultCount(found);
  return (
    <Status>
      {count > 0
        ? i18n.t(
            "{count, plural, one {One thing is not as the trail says.} other {# things are not as the trail says.}}",
            { count },
          )
        : found.isDone
          ? i18n.t("Everything is as the trail says.")
          : isRunning
            ? i18n.t("Checking. So far everything is as the trail says.")
            : i18n.t("Not checked to the end.")}
    </Status>
  );
}

function Tail({ state, zone }: { state: TrailState; zone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { events, entries, since } = state.tail;
  if (since === null) return i18n.t("nothing: every event has its seal");
  return i18n.t(
    "{events, plural, one {# event} other {# events}} and {entries, plural, one {# record of rows} other {# records of rows}}, since {since}",
    { events, entries, since: formatInstant(since, zone, locale) },
  );
}

function StatedRows({ at, rows, roleName }: { at: string; rows: number; roleName: string }) {
  const { i18n } = useLingui();
  return (
    <>
      <dt>{i18n.t("Taken as they stood")}</dt>
      <dd>
        {i18n.t("{rows, plural, one {# row} other {# rows}}, {at}, by database role {roleName}", {
          rows,
          at,
          roleName,
        })}
      </dd>
    </>
  );
}

function Faults({ found, zone }: { found: CheckedSoFar; zone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const ofSeals = found.seals.faults.map((fault): Fault => {
    const { kind, number, count, event, table } = fault;
    return {
      key: `${kind} ${number}`,
      what: sealFaultWord(i18n, kind, count),
      where: i18n.t("Seal {number}", { number: formatNumber(number, 0, locale) }),
      which: event ? (
        <>
          {actionWord(i18n, event.action)}, {formatInstant(event.at, zone, locale)}{" "}
          {event.subjectId && (
            <TextLink to={`${paths.trail}?about=${event.subjectKind}&one=${event.subjectId}`}>
              {subjectWord(i18n, event.subjectKind)}
            </TextLink>
          )}
        </>
      ) : (
        table && <span className="mono">{table}</span>
      ),
    };
  });
  const ofRows = [...found.tables.values()].flatMap(({ table, faults }) =>
    faults.map(
      ({ kind, key }): Fault => ({
        key: `${table} ${key}`,
        what: rowFaultWord(i18n, kind),
        where: <span className="mono">{table}</span>,
        which: <span className="mono trail-key">{key}</span>,
      }),
    ),
  );
  const faults = [...ofSeals, ...ofRows];
  if (faults.length === 0) return null;
  return (
    <Section id="faults" title={i18n.t("Not as the trail says")}>
      <DataTable
        caption={i18n.t("Not as the trail says")}
        columns={[
          { id: "what", head: i18n.t("What"), isRowHead: true, cell: ({ what }) => what },
          { id: "where", head: i18n.t("Where"), cell: ({ where }) => where },
          { id: "which", head: i18n.t("Which"), cell: ({ which }) => which },
        ]}
        rows={faults}
        rowKey={({ key }) => key}
        stacksOnPhone
      />
    </Section>
  );
}

function Foreign({ state, zone }: { state: TrailState; zone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<ForeignChange>[] = [
    {
      id: "role",
      head: i18n.t("Database role"),
      isRowHead: true,
      cell: ({ roleName }) => <span className="mono">{roleName}</span>,
    },
    { id: "what", head: i18n.t("What"), cell: ({ operation }) => operationWord(i18n, operation) },
    {
      id: "table",
      head: i18n.t("Table"),
      cell: ({ table }) => <span className="mono">{table}</span>,
    },
    {
      id: "rows",
      head: i18n.t("Rows"),
      kind: "figure",
      cell: ({ rows }) => formatNumber(rows, 0, locale),
    },
    {
      id: "when",
      head: i18n.t("When"),
      cell: ({ firstAt, lastAt }) => {
        const [first, last] = [firstAt, lastAt].map((at) => formatInstant(at, zone, locale));
        return first === last ? first : `${first} – ${last}`;
      },
    },
    {
      id: "keys",
      head: i18n.t("Such as"),
      cell: ({ keys }) => <span className="mono trail-key">{keys.join(", ")}</span>,
    },
  ];
  return (
    <Section id="foreign" title={i18n.t("To be explained")}>
      {state.unwatched.length > 0 && (
        <p>
          <strong>
            {i18n.t("Changes of these tables are not recorded, for their triggers are off:")}
          </strong>{" "}
          <span className="mono">{state.unwatched.join(", ")}</span>
        </p>
      )}
      {state.foreign.length > 0 && (
        <>
          <p>
            {i18n.t(
              "Recorded, but not by the application and without an event: somebody wrote in the database itself.",
            )}
          </p>
          <DataTable
            caption={i18n.t("Changes by other database roles")}
            columns={columns}
            rows={state.foreign}
            rowKey={({ roleName, table, operation }) => `${roleName} ${table} ${operation}`}
            stacksOnPhone
          />
        </>
      )}
    </Section>
  );
}

interface Part {
  key: string;
  name: ReactNode;
  count: number | null;
  word: ReactNode;
  /** Null: not checked. */
  faults: number | null;
}

function usePartsOf(found: CheckedSoFar, isRunning: boolean): Part[] {
  const { i18n } = useLingui();
  const { state, seals, tables } = found;
  const word = (faults: number | null, isNow: boolean) =>
    faults === null ? (
      <span className="not-assessed">
        {isNow ? i18n.t("being checked") : i18n.t("not checked")}
      </span>
    ) : faults === 0 ? (
      i18n.t("as the trail says")
    ) : (
      <strong>
        {i18n.t("{count, plural, one {# is not} other {# are not}}", { count: faults })}
      </strong>
    );
  const next = state.tables.find((table) => !tables.has(table));
  const ofSeals = seals.isDone ? seals.faults.reduce((sum, { count }) => sum + count, 0) : null;
  return [
    {
      key: "",
      name: i18n.t("Seals of the chain"),
      count: seals.checked,
      faults: ofSeals,
      word: (
        <>
          {word(ofSeals, isRunning)}
          {seals.erased > 0 &&
            `; ${i18n.t("{count, plural, one {of # event the personal values are erased} other {of # events the personal values are erased}}", { count: seals.erased })}`}
        </>
      ),
    },
    ...state.tables.map((table): Part => {
      const checked = tables.get(table);
      const faults = checked?.faultCount ?? null;
      return {
        key: table,
        name: <span className="mono trail-key">{table}</span>,
        count: checked?.rows ?? null,
        faults,
        word: word(faults, isRunning && seals.isDone && table === next),
      };
    }),
  ];
}

/** What is not in order first; the rest is folded, for there is nothing to be done about it. */
function Parts({ found, isRunning }: { found: CheckedSoFar; isRunning: boolean }) {
  const { i18n } = useLingui();
  const parts = usePartsOf(found, isRunning);
  const faulty = parts.filter(({ faults }) => faults !== null && faults > 0);
  const inOrder = parts.filter(({ faults }) => faults === 0);
  const open = parts.filter(({ faults }) => faults === null);
  return (
    <Section id="tables" title={i18n.t("Part by part")}>
      {faulty.length > 0 && (
        <PartsTable caption={i18n.t("Parts that are not as the trail says")} parts={faulty} />
      )}
      {inOrder.length > 0 && (
        <Folded
          title={i18n.t(
            "{count, plural, one {# part is as the trail says} other {# parts are as the trail says}}",
            { count: inOrder.length },
          )}
          parts={inOrder}
        />
      )}
      {open.length > 0 && (
        <Folded
          title={i18n.t(
            "{count, plural, one {# part is not checked yet} other {# parts are not checked yet}}",
            { count: open.length },
          )}
          parts={open}
        />
      )}
    </Section>
  );
}

function Folded({ title, parts }: { title: string; parts: readonly Part[] }) {
  const { i18n } = useLingui();
  return (
    <details className="trail-folded">
      <summary>{title}</summary>
      <PartsTable caption={i18n.t("Part by part")} parts={parts} />
    </details>
  );
}

function PartsTable({ caption, parts }: { caption: string; parts: readonly Part[] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <DataTable
      caption={caption}
      columns={[
        { id: "name", head: i18n.t("Table"), isRowHead: true, cell: ({ name }) => name },
        {
          id: "count",
          head: i18n.t("Rows"),
          kind: "figure",
          cell: ({ count }) => (count === null ? "" : formatNumber(count, 0, locale)),
        },
        { id: "word", head: i18n.t("Checked"), cell: (part) => part.word },
      ]}
      rows={parts}
      rowKey={({ key }) => key}
    />
  );
}
