import { useSyncExternalStore } from "react";
import {
  ApiError,
  api,
  connectionEvents,
  isUnreached,
  newChangeKey,
  type ReplySchema,
} from "./api";
import { createKeptList, KEPT, type KeptList } from "./kept-list";

/** What an act was, for whoever reads the list of what is not sent. */
export type ActWords =
  | {
      readonly kind: "mark-done" | "cannot" | "undo" | "comment";
      readonly findingId: string;
      readonly workerName: string;
      readonly text: string;
    }
  | {
      readonly kind: "round";
      readonly crewName: string;
      readonly date: string;
      readonly looks: number;
    };

/** What stands on the server where somebody else came first: as much of it as is shown. */
export interface StandsNow {
  readonly state: string;
  readonly revision: number;
  readonly byName: string | null;
  readonly text: string | null;
  /** What cannot be done any more can still be said. */
  readonly canComment?: boolean;
}

/** One change somebody made, with all that is needed to send it once: later, and by them only. */
export interface KeptAct {
  /** Its idempotency key. */
  readonly key: string;
  /** When it was made, an instant. */
  readonly at: string;
  readonly path: string;
  readonly body: unknown;
  /** The revision that was seen; null where something new is added. */
  readonly revision: number | null;
  readonly words: ActWords;
  readonly state: "unsent" | "conflict" | "refused";
  /** In a conflict. */
  readonly stands: StandsNow | null;
  /** Where it was refused: the problem's code. */
  readonly code: string | null;
}

export type NewAct = Pick<KeptAct, "path" | "body" | "revision" | "words"> & { key?: string };

export interface Settled {
  readonly key: string;
  readonly words: ActWords;
  readonly outcome: "sent" | "already-done";
}

const isAct = (value: unknown): value is KeptAct =>
  typeof value === "object" &&
  value !== null &&
  "key" in value &&
  "path" in value &&
  "words" in value &&
  "state" in value;

/** A finding, or another reply with a revision; checked by hand, as on every first page. */
interface Reply {
  readonly revision?: number;
  readonly state?: string;
  readonly can?: { readonly comment?: boolean };
  readonly steps?: readonly { readonly authorName: string | null; readonly text: string | null }[];
}
const anyReply: ReplySchema<Reply> = { parse: (value) => (value ?? {}) as Reply };
interface WhoIsThere {
  readonly user: { readonly id: string } | null;
  readonly endedAt: string | null;
}
const whoIsThere: ReplySchema<WhoIsThere> = { parse: (value) => value as WhoIsThere };

function standsNow(error: unknown): StandsNow | null {
  if (!(error instanceof ApiError) || error.status !== 412) return null;
  const current = (error.body as { current?: Reply } | null)?.current;
  if (typeof current?.revision !== "number") return null;
  const last = current.steps?.at(-1);
  return {
    state: current.state ?? "",
    revision: current.revision,
    byName: last?.authorName ?? null,
    text: last?.text ?? null,
    canComment: current.can?.comment === true,
  };
}

/** Words that were typed, where what they belonged to is over: they may be passed on as a comment. */
export const hasWordsToPassOn = ({ words, stands }: KeptAct): boolean =>
  stands?.canComment === true &&
  (words.kind === "cannot" || (words.kind === "comment" && stands.state === "closed")) &&
  words.text.trim() !== "";

/** What was to be done is done: nothing is left to send. */
const isAlreadyDone = ({ words }: KeptAct, { state }: StandsNow) =>
  words.kind === "mark-done" && (state === "done" || state === "closed");

const undoOf = ({ path, words }: KeptAct, { revision }: Reply): KeptAct => ({
  key: newChangeKey(),
  at: new Date().toISOString(),
  path,
  body: { kind: "undo" },
  revision: revision ?? null,
  words: words.kind === "round" ? words : { ...words, kind: "undo", text: "" },
  state: "unsent",
  stands: null,
  code: null,
});

export interface KeptActs {
  /** Without those that are on their way at this moment. */
  list(): readonly KeptAct[];
  subscribe(listener: () => void): () => void;
  /** Keeps an act before it is sent for the first time; `release` says that its sender has done with it. */
  hold(act: NewAct): KeptAct;
  release(key: string, isToStay: boolean): void;
  /** Taken back before it is sent; one that is on its way at this moment is undone behind it. */
  drop(key: string): void;
  /** Anew on what stands now, as another act. */
  again(key: string): void;
  /** Its words alone, as a comment on what stands now. */
  asComment(key: string): void;
  /** Sends what waits, one after the other, where the same person is signed in. */
  sendAll(): Promise<readonly Settled[]>;
}

function createKeptActs(kept: KeptList<KeptAct>, userId: string): KeptActs {
  const listeners = new Set<() => void>();
  const onTheirWay = new Set<string>();
  const takenBack = new Set<string>();
  let sendingKey: string | null = null;
  let shown: readonly KeptAct[] = kept.list();
  let isSending = false;
  function changed() {
    shown = kept.list().filter(({ key }) => !onTheirWay.has(key) && !takenBack.has(key));
    for (const listener of listeners) listener();
  }

  /** Later acts on the same record saw the same revision: one's own change is no conflict. */
  function moveOn(sent: KeptAct, { revision }: Reply) {
    if (revision === undefined) return;
    for (const act of kept.list())
      if (act.path === sent.path && act.state === "unsent" && act.revision === sent.revision)
        kept.put({ ...act, revision });
  }

  /** Null where it waits on. @throws what says that nothing else can be sent now either. */
  async function send(act: KeptAct): Promise<Settled | null> {
    const settled = (outcome: Settled["outcome"]): Settled => {
      kept.remove(act.key);
      return { key: act.key, words: act.words, outcome };
    };
    sendingKey = act.key;
    try {
      const reply = await api.post(act.path, {
        body: act.body,
        ifMatch: act.revision === null ? undefined : String(act.revision),
        idempotencyKey: act.key,
        schema: anyReply,
      });
      moveOn(act, reply);
      if (takenBack.has(act.key)) kept.put(undoOf(act, reply));
      return settled("sent");
    } catch (error) {
      if (takenBack.has(act.key)) kept.remove(act.key);
      if (!(error instanceof ApiError) || isUnreached(error)) throw error;
      if ([401, 429].includes(error.status) || error.code === "csrf") throw error;
      const stands = standsNow(error);
      if (stands && isAlreadyDone(act, stands)) return settled("already-done");
      if (!takenBack.has(act.key))
        kept.put({ ...act, state: stands ? "conflict" : "refused", stands, code: error.code });
      return null;
    } finally {
      sendingKey = null;
    }
  }

  /** What is in a conflict as another act, on what stands now. */
  function putAnew(
    key: string,
    as: (act: KeptAct) => Pick<KeptAct, "body" | "words"> | null,
  ): void {
    const act = kept.list().find((other) => other.key === key);
    const what = act && as(act);
    if (!act?.stands || !what) return;
    kept.remove(key);
    kept.put({
      ...act,
      ...what,
      key: newChangeKey(),
      revision: act.stands.revision,
      state: "unsent",
      stands: null,
      code: null,
    });
    changed();
  }

  return {
    list: () => shown,
    subscribe(listener) {
      const onStorage = () => changed();
      listeners.add(listener);
      window.addEventListener("storage", onStorage);
      return () => {
        listeners.delete(listener);
        window.removeEventListener("storage", onStorage);
      };
    },
    hold({ key = newChangeKey(), ...what }) {
      const act: KeptAct = {
        ...what,
        key,
        at: new Date().toISOString(),
        state: "unsent",
        stands: null,
        code: null,
      };
      onTheirWay.add(key);
      kept.put(act);
      return act;
    },
    release(key, isToStay) {
      if (!isToStay) kept.remove(key);
      onTheirWay.delete(key);
      changed();
    },
    drop(key) {
      takenBack.add(key);
      if (key !== sendingKey) kept.remove(key);
      changed();
    },
    again: (key) => putAnew(key, ({ body, words }) => ({ body, words })),
    asComment: (key) =>
      putAnew(key, ({ words }) =>
        words.kind === "round"
          ? null
          : {
              body: { kind: "comment", text: words.text },
              words: { ...words, kind: "comment" },
            },
      ),
    async sendAll() {
      if (isSending) return [];
      isSending = true;
      const settled: Settled[] = [];
      try {
        const { user, endedAt } = await api.get("/session", {
          schema: whoIsThere,
          asksWhoIsThere: true,
        });
        if (!user) connectionEvents.tell(endedAt ? "access-over" : "session-expired");
        // Somebody else may have signed in here in another window: what was done by one is not sent in another's name.
        if (user?.id !== userId) return [];
        const tried = new Set<string>();
        const next = () =>
          kept
            .list()
            .find(
              ({ key, state }) => state === "unsent" && !onTheirWay.has(key) && !tried.has(key),
            );
        for (let act = next(); act; act = next()) {
          tried.add(act.key);
          const outcome = await send(act);
          if (outcome) settled.push(outcome);
        }
      } catch {
        // No connection, or nobody signed in: it waits, and the top of the page says which.
      } finally {
        isSending = false;
        changed();
      }
      return settled;
    },
  };
}

const made = new Map<string, KeptActs>();

/** The acts of a user on this device. */
export function keptActsOf(userId: string): KeptActs {
  const known = made.get(userId);
  if (known) return known;
  const acts = createKeptActs(
    createKeptList({
      storage: localStorage,
      name: KEPT.acts,
      userId,
      idOf: ({ key }) => key,
      isItem: isAct,
    }),
    userId,
  );
  made.set(userId, acts);
  return acts;
}

export function useKeptActs(userId: string): readonly KeptAct[] {
  const acts = keptActsOf(userId);
  return useSyncExternalStore(acts.subscribe, acts.list);
}
