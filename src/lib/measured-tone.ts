import { useEffect, useRef, useState } from "react";
import type { CalibrationTone } from "../../shared/schemas/recording";

/** As long as somebody may still be typing what the calibrator gives. */
const TYPING_MS = 500;

interface Measured {
  readonly key: string;
  readonly file: File;
  readonly tone: CalibrationTone | null;
  readonly error: unknown;
}

/**
 * A calibrator's tone, measured with what is said of it as it stands: said otherwise it is measured again, and until
 * then there is none. `facts` null: something is not filled in yet.
 */
export function useMeasuredTone<Facts>(
  file: File | null,
  facts: Facts | null,
  measure: (file: File, facts: Facts) => Promise<CalibrationTone>,
): { tone: CalibrationTone | null; error: unknown; isPending: boolean } {
  const key = facts === null ? null : JSON.stringify(facts);
  const [measured, setMeasured] = useState<Measured | null>(null);
  const latest = useRef({ facts, measure });
  latest.current = { facts, measure };
  const lastFile = useRef<File | null>(null);

  useEffect(() => {
    if (file === null || key === null) return;
    let isLatest = true;
    const isNew = lastFile.current !== file;
    const timer = setTimeout(
      () => {
        lastFile.current = file;
        const { facts: said, measure: ask } = latest.current;
        if (said === null) return;
        ask(file, said).then(
          (tone) => isLatest && setMeasured({ key, file, tone, error: null }),
          (error: unknown) => isLatest && setMeasured({ key, file, tone: null, error }),
        );
      },
      isNew ? 0 : TYPING_MS,
    );
    return () => {
      isLatest = false;
      clearTimeout(timer);
    };
  }, [file, key]);

  const found = measured?.key === key && measured.file === file ? measured : null;
  return {
    tone: found?.tone ?? null,
    error: found?.error ?? null,
    isPending: file !== null && key !== null && found === null,
  };
}
