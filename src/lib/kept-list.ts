/**
 * What one user keeps on this device until it is sent, and what was seen last: the one way in which pages keep such things.
 * Written at once and by the user's id, so that nothing is lost with the window and nobody else at the device sees it.
 */
export interface KeptList<Item> {
  list(): readonly Item[];
  /** In the place of what has the same id; otherwise as the last. */
  put(item: Item): void;
  remove(id: string): void;
}

const PREFIX = "dinward.";
const keyOf = (name: string, userId: string) => `${PREFIX}${name}.${userId}`;

/** Names of the lists; the number goes up where what is in one changes its shape. */
export const KEPT = { rounds: "wearing.1", acts: "acts.1", seen: "seen.2" } as const;
export type KeptName = (typeof KEPT)[keyof typeof KEPT];

function readAll(storage: Storage, name: KeptName, userId: string): unknown[] {
  try {
    const value: unknown = JSON.parse(storage.getItem(keyOf(name, userId)) ?? "[]");
    return Array.isArray(value) ? value : [];
  } catch {
    // Something else wrote here, or nothing may be kept: there is nothing of ours to lose.
    return [];
  }
}

export function createKeptList<Item>({
  storage,
  name,
  userId,
  idOf,
  isItem,
  most = Number.POSITIVE_INFINITY,
}: {
  storage: Storage;
  name: KeptName;
  userId: string;
  idOf: (item: Item) => string;
  isItem: (value: unknown) => value is Item;
  /** Beyond so many the first ones go. */
  most?: number;
}): KeptList<Item> {
  const list = () => readAll(storage, name, userId).filter(isItem);
  function write(items: readonly Item[]) {
    try {
      if (items.length === 0) storage.removeItem(keyOf(name, userId));
      else storage.setItem(keyOf(name, userId), JSON.stringify(items));
    } catch {
      // Full, or not allowed: what was done still stands on the page.
    }
  }
  return {
    list,
    put(item) {
      const items = list();
      const at = items.findIndex((other) => idOf(other) === idOf(item));
      if (at < 0) items.push(item);
      else items[at] = item;
      write(items.slice(Math.max(0, items.length - most)));
    },
    remove(id) {
      const items = list();
      const left = items.filter((item) => idOf(item) !== id);
      if (left.length < items.length) write(left);
    },
  };
}

/** How much of a user's work would be lost with this device: acts that are not sent, and rounds that are being made. */
export const countUnsent = (storage: Storage, userId: string): number =>
  readAll(storage, KEPT.acts, userId).length + readAll(storage, KEPT.rounds, userId).length;

/** At sign-out: one person's data leave a shared tablet. */
export function forgetKept(storage: Storage, userId: string): void {
  try {
    for (const name of Object.values(KEPT)) storage.removeItem(keyOf(name, userId));
  } catch {
    // Nothing was kept either.
  }
}
