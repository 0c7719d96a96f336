import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useRef, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { formatDayMonth, localDateOf } from "../../shared/format/date";
import { isolate } from "../../shared/i18n/isolate";
import type { WearingRoundView, WearingTally } from "../../shared/schemas/wearing";
import { Button, ButtonLink } from "../components/button";
import { DateInput } from "../components/date-input";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { ProblemIssues } from "../components/problem-issues";
import { hasRole, useUser } from "../features/session/session";
import { useSendRound, wearingQueries } from "../features/wearing/queries";
import { TallyFoot, TallyRows } from "../features/wearing/round-tally";
import {
  afterSent,
  countAll,
  countsOf,
  createRoundDraftStore,
  emptyRound,
  lastTap,
  type PendingRound,
  type RoundDraft,
  type RoundDraftStore,
  tallyWorkers,
  tapsBeside,
  toSend,
  undoTap,
} from "../features/wearing/tally";
import { ApiError, isUnreached, newChangeKey } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { keptActsOf, useKeptActs } from "../lib/kept-acts";
import { useOneAtATime } from "../lib/one-at-a-time";
import { paths } from "../paths";
import "../styles/sample.css";
import "../styles/wearing.css";

/** A round through a crew on a phone and with gloves on: who wears it, tap by tap, kept until it is sent. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [search, setSearch] = useSearchParams();
  const [store] = useState(() => createRoundDraftStore(localStorage, user.id));
  const [sent, setSent] = useState<WearingRoundView | null>(null);
  const [isChoosing, setChoosing] = useState(false);
  const [taskId, setTaskId] = useState<string | null>(null);
  const today = localDateOf(new Date().toISOString(), user.sites[0]?.timeZone ?? "UTC");
  const date = search.get("date") ?? today;
  const crews = useQuery(wearingQueries.crews(date));
  const asked = search.get("crew");
  const crew = crews.data?.find(({ id }) => id === asked) ?? crews.data?.[0];
  const crewId = crew?.id ?? asked;
  const tally = useQuery({
    ...wearingQueries.tally(crewId ?? "", date),
    enabled: crewId !== null && crew !== undefined,
  });
  const shownTask = tally.data?.tasks.find(({ id }) => id === taskId);
  const isOfSeveralSites = new Set(crews.data?.map(({ siteId }) => siteId)).size > 1;

  function choose(next: { crew?: string; date?: string }) {
    setSent(null);
    setTaskId(null);
    setSearch(
      (before) => {
        const params = new URLSearchParams(before);
        for (const [name, value] of Object.entries(next)) params.set(name, value);
        return params;
      },
      { replace: true },
    );
  }

  const waiting = store
    .list()
    .filter((draft) => draft.crewId !== crewId || draft.date !== date || sent !== null);
  const dayWords = (isoDate: string) => formatDayMonth(isoDate, locale);
  const ways = hasRole(user, "officer") ? (
    <TextLink to={paths.wearing}>{i18n.t("Wearing rounds")}</TextLink>
  ) : (
    <>
      <TextLink to={crewId ? paths.crewSheetOf(crewId) : paths.crewSheet}>
        {i18n.t("Crew sheet")}
      </TextLink>
      {" · "}
      <TextLink to={paths.wearing}>{i18n.t("Earlier rounds")}</TextLink>
    </>
  );

  if (sent)
    return (
      <PageBody>
        <div className="sample-page">
          <PageHead
            title={i18n.t("Sent")}
            lead={i18n.t("{crew}, {day}: worn in {worn} of {seen} looks.", {
              crew: isolate(crew?.name ?? ""),
              day: dayWords(sent.seenOn),
              worn: sent.wornCount,
              seen: sent.seenCount,
            })}
          />
          <Waiting drafts={waiting} onChoose={(draft) => choose(whereOf(draft))} />
          <div className="sample-next">
            <Button size="worker" kind="primary" autoFocus onClick={() => setSent(null)}>
              {i18n.t("Another round")}
            </Button>
            <ButtonLink size="worker" to={paths.wearing}>
              {i18n.t("All rounds")}
            </ButtonLink>
          </div>
        </div>
      </PageBody>
    );

  return (
    <>
      <PageBody>
        <div className="sample-page round-page">
          <PageHead
            way={ways}
            title={i18n.t("Wearing round")}
            lead={i18n.t("Tap once for every look. It is kept on this phone until it is sent.")}
          />
          <Waiting drafts={waiting} onChoose={(draft) => choose(whereOf(draft))} />
          <details
            className="sample-more round-where"
            open={isChoosing || crews.data?.length === 0}
            onToggle={(event) => setChoosing(event.currentTarget.open)}
          >
            <summary>
              <span>
                {[crew && isolate(crew.name), dayWords(date), shownTask?.name]
                  .filter(Boolean)
                  .join(", ")}
                <span className="beneath">{i18n.t("Another crew, date or task")}</span>
              </span>
            </summary>
            <div className="sample-form">
              <div className="field">
                <label className="field-label" htmlFor="round-date">
                  {i18n.t("Date")}
                </label>
                <DateInput
                  id="round-date"
                  key={date}
                  value={date}
                  max={today}
                  onChoose={(chosen) => choose({ date: chosen })}
                />
              </div>
              {crews.data && crews.data.length > 0 && (
                <div className="field">
                  <label className="field-label" htmlFor="round-crew">
                    {i18n.t("Crew")}
                  </label>
                  <select
                    id="round-crew"
                    className="input"
                    value={crewId ?? ""}
                    onChange={(event) => choose({ crew: event.target.value })}
                  >
                    {crews.data.map(({ id, name, siteName }) => (
                      <option key={id} value={id}>
                        {isOfSeveralSites ? `${name}, ${siteName}` : name}
                      </option>
                    ))}
                  </select>
                </div>
              )}
              {tally.data && tally.data.tasks.length > 1 && (
                <div className="field">
                  <label className="field-label" htmlFor="round-task">
                    {i18n.t("Show")}
                  </label>
                  <select
                    id="round-task"
                    className="input"
                    value={taskId ?? ""}
                    onChange={(event) => setTaskId(event.target.value || null)}
                  >
                    <option value="">{i18n.t("All tasks in noise")}</option>
                    {tally.data.tasks.map(({ id, name }) => (
                      <option key={id} value={id}>
                        {name}
                      </option>
                    ))}
                  </select>
                </div>
              )}
            </div>
          </details>
          {crews.isError && !crews.data && (
            <Failed error={crews.error} onRetry={() => void crews.refetch()} />
          )}
          {crews.data?.length === 0 && (
            <Empty title={i18n.t("No crew is yours on that date.")}>
              {i18n.t("Choose another date, or ask your safety officer.")}
            </Empty>
          )}
          {tally.isError && !tally.data && (
            <Failed error={tally.error} onRetry={() => void tally.refetch()} />
          )}
          {(crews.isPending || (crew && tally.isPending)) && <TallyLoading />}
          {tally.data && (
            <Round
              key={`${tally.data.crewId} ${tally.data.date}`}
              tally={tally.data}
              taskId={shownTask?.id ?? null}
              store={store}
              onSent={(round) => {
                setSent(round);
                window.scrollTo(0, 0);
              }}
            />
          )}
        </div>
      </PageBody>
      <Folio>
        {i18n.t("What a round sees is the wearing time of days on which the shift says none.")}
      </Folio>
    </>
  );
}

const whereOf = ({ crewId, date }: RoundDraft) => ({ crew: crewId, date });

function Waiting({
  drafts,
  onChoose,
}: {
  drafts: readonly RoundDraft[];
  onChoose: (draft: RoundDraft) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (drafts.length === 0) return null;
  return (
    <div className="sample-draft">
      {drafts.map((draft) => (
        <TextButton key={`${draft.crewId} ${draft.date}`} onClick={() => onChoose(draft)}>
          {i18n.t("Not sent yet: {crew}, {day}, {looks, plural, one {# look} other {# looks}}", {
            crew: isolate(draft.crewName),
            day: formatDayMonth(draft.date, locale),
            looks: draft.taps.length,
          })}
        </TextButton>
      ))}
    </div>
  );
}

const LOADING_ROWS = ["first", "second", "third"];

function TallyLoading() {
  const { i18n } = useLingui();
  return (
    <div className="tally is-loading" aria-busy="true">
      <span className="sr-only" role="status">
        {i18n.t("Loading")}
      </span>
      {LOADING_ROWS.map((key) => (
        <div key={key} className="tally-worker">
          <span className="loading-line" />
        </div>
      ))}
    </div>
  );
}

/** One crew on one date. */
function Round({
  tally,
  taskId,
  store,
  onSent,
}: {
  tally: WearingTally;
  /** The only one to be shown; null: all in noise. */
  taskId: string | null;
  store: RoundDraftStore;
  onSent: (round: WearingRoundView) => void;
}) {
  const { i18n } = useLingui();
  const { crewId, crewName, siteId, date } = tally;
  const empty = emptyRound({ crewId, crewName, siteId, date });
  const [draft, setDraft] = useState(() => store.read(crewId, date) ?? empty);
  /** As it stands by now: taps may come while a sending is on its way. */
  const latest = useRef(draft);
  const [said, setSaid] = useState("");
  const [isDiscarding, setDiscarding] = useState(false);
  const [wantsTap, setWantsTap] = useState(false);
  const [isKept, setKept] = useState(false);
  const check = useRef<HTMLHeadingElement>(null);
  const send = useSendRound();
  const userId = useUser().id;
  const acts = keptActsOf(userId);
  const waitsHere = useKeptActs(userId).some(({ words }) => words.kind === "round");
  const { begin, end } = useOneAtATime();
  const countOf = countsOf(draft.taps);
  const all = countAll(draft.taps);
  const { workers, withoutTaskCount } = tallyWorkers(tally, taskId);
  const beside = tapsBeside(tally, draft.taps);
  const isWaiting = draft.pending !== null;

  function keep(next: RoundDraft) {
    latest.current = next;
    setDraft(next);
    store.write(next);
  }

  function nameOf(workerId: string, ofTask: string) {
    const worker = tally.workers.find(({ id }) => id === workerId)?.name ?? "";
    const task = tally.tasks.find(({ id }) => id === ofTask)?.name ?? "";
    return { name: isolate(worker), task };
  }

  function undo() {
    const last = lastTap(draft);
    if (last === null) return;
    const next = undoTap(draft);
    keep(next);
    const count = countsOf(next.taps)(last.workerId, last.taskId);
    setSaid(
      i18n.t("Taken back: {name}, {task}, now {worn} of {seen}", {
        ...nameOf(last.workerId, last.taskId),
        worn: count?.worn ?? 0,
        seen: count?.seen ?? 0,
      }),
    );
  }

  function leaveSent(pending: PendingRound) {
    keep(afterSent(latest.current, pending) ?? empty);
  }

  function sendIt() {
    if (draft.taps.length === 0) {
      setWantsTap(true);
      return;
    }
    if (!begin()) return;
    const pending = toSend(draft, newChangeKey);
    keep({ ...draft, pending });
    send.mutate(pending, {
      onSuccess: (round) => {
        leaveSent(pending);
        onSent(round);
      },
      onError: (error) => {
        // It waits with what else is not sent, and goes under its key as soon as that can be: the round is over.
        if (isUnreached(error) || (error instanceof ApiError && error.status === 401)) {
          acts.hold({
            key: pending.key,
            path: "/wearing-rounds",
            body: pending.body,
            revision: null,
            words: { kind: "round", crewName, date, looks: pending.tapCount },
          });
          acts.release(pending.key, true);
          leaveSent(pending);
          send.reset();
          setSaid("");
          setKept(true);
          check.current?.focus({ preventScroll: true });
          return;
        }
        // Refused, and not lost on the way: what is sent next is another round.
        if (error instanceof ApiError && error.status >= 400 && error.status < 500)
          keep({ ...latest.current, pending: null });
      },
      onSettled: end,
    });
  }

  function discard() {
    keep(empty);
    setDiscarding(false);
    setSaid("");
  }

  if (workers.length === 0 && taskId === null && draft.taps.length === 0)
    return (
      <Empty title={i18n.t("Nobody of this crew has a task in noise on that date.")}>
        {i18n.t("Tasks come from the job, and count where a protector or a zone is given.")}
      </Empty>
    );
  return (
    <>
      <TallyRows
        workers={workers}
        countOf={countOf}
        onTap={(tap) => {
          setKept(false);
          const taps = [...draft.taps, tap];
          keep({ ...draft, taps });
          setWantsTap(false);
          const count = countsOf(taps)(tap.workerId, tap.taskId);
          setSaid(
            i18n.t("{name}, {task}: {worn} of {seen} worn", {
              ...nameOf(tap.workerId, tap.taskId),
              worn: count?.worn ?? 0,
              seen: count?.seen ?? 0,
            }),
          );
        }}
      />
      {withoutTaskCount > 0 && (
        <p className="beneath">
          {i18n.t(
            "{people, plural, one {# person of this crew has no task in noise by the job and is} other {# people of this crew have no task in noise by their jobs and are}} not listed.",
            { people: withoutTaskCount },
          )}
        </p>
      )}
      <section className="round-check" aria-labelledby="round-check">
        <h2 id="round-check" ref={check} tabIndex={-1}>
          {i18n.t("Check and send")}
        </h2>
        <p>
          {i18n.t(
            "Worn in {worn} of {seen} looks, {people, plural, one {# person} other {# people}}.",
            {
              ...all,
              people: new Set(draft.taps.map(({ workerId }) => workerId)).size,
            },
          )}
        </p>
        {beside.length > 0 && (
          <p>
            {i18n.t(
              "{looks, plural, one {# look was} other {# looks were}} at people or tasks that are no longer on this list; they are sent with the others.",
              { looks: beside.length },
            )}
          </p>
        )}
        <div className="sample-form">
          <fieldset className="field round-source" disabled={isWaiting}>
            <legend className="field-label">{i18n.t("Where it comes from")}</legend>
            {(["round", "own-report"] as const).map((source) => (
              <label key={source} className="choice">
                <input
                  type="radio"
                  name="round-source"
                  checked={draft.source === source}
                  onChange={() => keep({ ...draft, source })}
                />
                <span>
                  {source === "round"
                    ? i18n.t("Seen on a round")
                    : i18n.t("Told by the workers themselves")}
                </span>
              </label>
            ))}
          </fieldset>
          <div className="field">
            <label className="field-label" htmlFor="round-note">
              {i18n.t("Note")}
              <span className="optional"> {i18n.t("(optional)")}</span>
            </label>
            <textarea
              id="round-note"
              className="input"
              rows={3}
              maxLength={2000}
              readOnly={isWaiting}
              value={draft.note}
              onChange={(event) => keep({ ...draft, note: event.target.value })}
            />
          </div>
          {wantsTap && draft.taps.length === 0 && (
            <p className="field-error" role="alert">
              {i18n.t("Nothing was tapped yet.")}
            </p>
          )}
          <p role="status">
            {isKept &&
              (waitsHere
                ? i18n.t(
                    "The round is kept on this device and sent as soon as there is a connection.",
                  )
                : i18n.t("The round was sent."))}
          </p>
          <ProblemIssues error={send.error} />
          {isWaiting && !send.isPending && (
            <p>
              {i18n.t(
                "It may have arrived. Send it again: it counts once, and what was tapped since stays for the next round.",
              )}
            </p>
          )}
          <Button size="worker" kind="primary" isBusy={send.isPending} onClick={sendIt}>
            {isWaiting ? i18n.t("Send again") : i18n.t("Send")}
          </Button>
          {!isWaiting &&
            draft.taps.length > 0 &&
            (isDiscarding ? (
              <>
                <Button size="worker" autoFocus onClick={discard}>
                  {i18n.t("Discard what is tapped")}
                </Button>
                <Button size="worker" onClick={() => setDiscarding(false)}>
                  {i18n.t("Keep it")}
                </Button>
              </>
            ) : (
              <TextButton className="round-discard" onClick={() => setDiscarding(true)}>
                {i18n.t("Discard this round")}
              </TextButton>
            ))}
        </div>
      </section>
      {draft.taps.length > 0 && (
        <TallyFoot
          draft={draft}
          said={said}
          onUndo={undo}
          onCheck={() => {
            check.current?.scrollIntoView();
            check.current?.focus({ preventScroll: true });
          }}
        />
      )}
    </>
  );
}
