import type { RecordingCode } from "../../shared/schemas/recording";

export type RecordingParams = Readonly<Record<string, string | number>>;

/** Why a recording cannot be used, or not without somebody's word for it. */
export class RecordingError extends Error {
  constructor(
    readonly code: RecordingCode,
    readonly params: RecordingParams = {},
  ) {
    super(code);
  }
}
