import type { FileView, SampleInput } from "../../../shared/schemas/outing";
import { Unreadable } from "../../components/form";
import type { SampleValues } from "./sample-fields";

/** A sample that is being taken: kept on the phone, so that a reload, a call or an empty battery loses nothing. */
export interface SampleDraft {
  readonly values: SampleValues;
  readonly files: readonly FileView[];
  /** ISO instant at which the timer was started; null while it stands. */
  readonly timerStartedAt: string | null;
  /** The change's key with the body that it stands for: sent again after a lost connection it counts once. */
  readonly pending: { readonly key: string; readonly body: string } | null;
}

const VERSION = 1;
const keyOf = (userId: string) => `dinward.sample.${VERSION}.${userId}`;

const isDraft = (value: unknown): value is SampleDraft =>
  typeof value === "object" &&
  value !== null &&
  "values" in value &&
  typeof value.values === "object" &&
  value.values !== null &&
  "files" in value &&
  Array.isArray(value.files);

export interface SampleDraftStore {
  read(): SampleDraft | null;
  write(draft: SampleDraft | null): void;
}

export function createSampleDraftStore(storage: Storage, userId: string): SampleDraftStore {
  const key = keyOf(userId);
  return {
    read() {
      try {
        const value: unknown = JSON.parse(storage.getItem(key) ?? "null", (_, one) =>
          // What could not be read stands in its field as it was typed.
          Unreadable.revive(one),
        );
        return isDraft(value) ? value : null;
      } catch {
        // Something else wrote here: there is no draft of ours to lose.
        return null;
      }
    },
    write(draft) {
      if (draft === null) storage.removeItem(key);
      else storage.setItem(key, JSON.stringify(draft));
    },
  };
}

/** Whole seconds on the timer. */
export const elapsedS = (startedAt: string, now: Date): number =>
  Math.max(0, Math.floor((now.getTime() - Date.parse(startedAt)) / 1000));

/** Minutes that a sample lasted, in full tenths: the one that was begun does not count. */
export const elapsedMin = (startedAt: string, now: Date): number =>
  Math.floor(elapsedS(startedAt, now) / 6) / 10;

/** "05:07" on the timer. */
export function timerText(seconds: number): string {
  const two = (value: number) => String(value).padStart(2, "0");
  return `${two(Math.floor(seconds / 60))}:${two(seconds % 60)}`;
}

/**
 * What is sent, and under which key. A start that follows from the length alone moves on with the clock: sent again after
 * a lost connection, it is still the sample that was sent first.
 */
export function toSend(
  body: SampleInput,
  isStartDerived: boolean,
  pending: SampleDraft["pending"],
  newKey: () => string,
): { body: SampleInput; pending: NonNullable<SampleDraft["pending"]> } {
  if (pending) {
    const before = JSON.parse(pending.body) as SampleInput;
    const again = isStartDerived
      ? { ...body, startedAt: before.startedAt, date: before.date }
      : body;
    if (JSON.stringify(again) === pending.body) return { body: again, pending };
  }
  return { body, pending: { key: newKey(), body: JSON.stringify(body) } };
}

/** What stays for the next sample of the same task. */
export function nextOf(values: SampleValues): SampleValues {
  return {
    ...values,
    levelDb: null,
    durationMin: null,
    startedAt: null,
    takenFrom: null,
    lceqDb: null,
    lasMaxDb: null,
    peakDb: null,
    octaveBandsDb: null,
    isClipped: false,
    isUnderRange: false,
    keptReason: null,
    unusual: null,
  };
}
