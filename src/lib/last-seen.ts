import { isUnreached } from "./api";
import { createKeptList, KEPT } from "./kept-list";

/** When a state that could not be asked for anew was seen; null for one that has just come. */
export type Seen<T> = T & { readonly asOf: string | null };

interface SeenState {
  readonly name: string;
  readonly at: string;
  readonly state: object;
}

const isSeen = (value: unknown): value is SeenState =>
  typeof value === "object" &&
  value !== null &&
  "name" in value &&
  "at" in value &&
  "state" in value;

/** A crew's sheet, its rounds and a few days' tallies; more would fill the device. */
const MOST_STATES = 12;

let keeperId: string | null = null;

/** For whom this device keeps what was seen; null: for nobody. */
export function keepSeenFor(userId: string | null): void {
  keeperId = userId;
}

/** Asks, and keeps the answer; where nobody can be reached, the last answer with its time. */
export async function orLastSeen<T extends object>(
  name: string,
  ask: () => Promise<T>,
): Promise<Seen<T>> {
  const askedFor = keeperId;
  const kept =
    keeperId === null
      ? null
      : createKeptList<SeenState>({
          storage: localStorage,
          name: KEPT.seen,
          userId: keeperId,
          idOf: (item) => item.name,
          isItem: isSeen,
          most: MOST_STATES,
        });
  try {
    const state = await ask();
    // Whoever asked may have signed out meanwhile: nothing of theirs is written then.
    if (keeperId !== askedFor) return { ...state, asOf: null };
    // Anew as the last one: what was not looked at for longest goes first.
    kept?.remove(name);
    kept?.put({ name, at: new Date().toISOString(), state });
    return { ...state, asOf: null };
  } catch (error) {
    const last = isUnreached(error) ? kept?.list().find((item) => item.name === name) : undefined;
    if (!last) throw error;
    return { ...(last.state as T), asOf: last.at };
  }
}
