/** The same number, 0 to under 1, for the same words: what one day holds does not hang on how many came before it. */
export function chance(...words: readonly (string | number)[]): number {
  let hash = 2166136261;
  for (const mark of words.join("|")) hash = Math.imul(hash ^ mark.codePointAt(0)!, 16777619);
  hash = Math.imul(hash ^ (hash >>> 16), 2246822507);
  hash = Math.imul(hash ^ (hash >>> 13), 3266489909);
  return ((hash ^ (hash >>> 16)) >>> 0) / 2 ** 32;
}
