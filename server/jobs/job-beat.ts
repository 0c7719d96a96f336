/** Progress is written this often, ms; it also says that somebody is at work. */
const PROGRESS_MS = 700;

class GivenUp extends Error {}

export interface Watch {
  signal: AbortSignal;
  /** 0 to 100. */
  onProgress: (progressPct: number) => void;
}

/**
 * Does a long piece of work while its row tells how far it is. `write` puts the progress into the row and says whether the
 * order still stands: if it does not, the work is ended where it is, and nothing comes of it.
 */
export async function whileBeating(
  write: (progressPct: number) => Promise<boolean>,
  work: (watch: Watch) => Promise<void>,
): Promise<void> {
  const givenUp = new AbortController();
  let progressPct = 0;
  let isWriting = false;
  const beat = setInterval(() => {
    if (isWriting) return;
    isWriting = true;
    write(progressPct)
      .then(
        (isMine) => {
          if (!isMine) givenUp.abort(new GivenUp());
        },
        // The next one will tell.
        () => undefined,
      )
      .finally(() => {
        isWriting = false;
      });
  }, PROGRESS_MS);
  try {
    await work({
      signal: givenUp.signal,
      onProgress: (pct) => {
        progressPct = Math.min(99, pct);
      },
    });
  } catch (error) {
    // Given up, or the failure of what was given up, as of a file that had gone already.
    if (!(error instanceof GivenUp) && (await write(progressPct))) throw error;
  } finally {
    clearInterval(beat);
  }
}
