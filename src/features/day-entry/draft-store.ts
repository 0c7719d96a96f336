import type { DayDraft, RowDraft } from "./draft";

/** What was typed on this device and is not on the server yet. */
export interface StoredDraft {
  readonly keptAt: string;
  readonly rows: readonly RowDraft[];
  readonly addedTaskIds: readonly string[];
  /** A request whose outcome is not known: sent again with the same key it counts once. */
  readonly pending: PendingSave | null;
}

export interface PendingSave {
  readonly key: string;
  readonly body: string;
}

const VERSION = 2;
const keyOf = (userId: string, crewId: string, date: string) =>
  `dinward.day-entry.${VERSION}.${userId}.${crewId}.${date}`;

/** By user, crew and date: two people at one device do not see each other's. */
export interface DraftStore {
  read(): StoredDraft | null;
  write(draft: DayDraft, pending: PendingSave | null): void;
}

function isStored(value: unknown): value is StoredDraft {
  return (
    typeof value === "object" &&
    value !== null &&
    "rows" in value &&
    Array.isArray(value.rows) &&
    "addedTaskIds" in value &&
    Array.isArray(value.addedTaskIds)
  );
}

export function createDraftStore(
  storage: Storage,
  userId: string,
  crewId: string,
  date: string,
): DraftStore {
  const key = keyOf(userId, crewId, date);
  return {
    read() {
      try {
        const value: unknown = JSON.parse(storage.getItem(key) ?? "null");
        return isStored(value) ? value : null;
      } catch {
        // Something else wrote here: there is no draft of ours to lose.
        return null;
      }
    },
    write(draft, pending) {
      const rows = draft.rows.filter((row) => row.isTouched || row.isConfirmed);
      if (rows.length === 0 && pending === null) storage.removeItem(key);
      else {
        const kept: StoredDraft = {
          keptAt: new Date().toISOString(),
          rows,
          addedTaskIds: draft.addedTaskIds,
          pending,
        };
        storage.setItem(key, JSON.stringify(kept));
      }
    },
  };
}

/** Puts what was kept on top of what the server has; rows of people who left the crew are gone. */
export function restoreDraft(draft: DayDraft, stored: StoredDraft): DayDraft {
  const kept = new Map(stored.rows.map((row) => [row.workerId, row]));
  return {
    rows: draft.rows.map((row) => kept.get(row.workerId) ?? row),
    addedTaskIds: stored.addedTaskIds,
  };
}
