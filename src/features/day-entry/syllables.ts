/** Fewest letters of a word before and after a break. */
const FEWEST_LETTERS = 3;
const VOWELS = "aeiouyäöüàâáãåæèéêëìíîïòóôõøùúûœ";
/** Consonants that begin a syllable together. */
const ONSET =
  /(?:sch[lmnrw]?|(?<![gk])sp[lr]?|st[r]?|ch|ck|ph[lr]?|th[r]?|sh[r]?|[bcdfgkptv]r|[bcfgkp]l|kn|qu|.)$/isu;

/** What the ending is put behind whole: grind-ing, linish-ing. */
const BEFORE_ING = /^(.*(?:ch|ck|nd|sh|st))(ing)$/iu;

const isVowel = (letter: string) => VOWELS.includes(letter.toLowerCase());

/**
 * Parts between which a word of English or German may be broken at the end of a line: before the consonants that begin its
 * next syllable ("Grund-lärm", "Tear-down"). A rule of thumb for heads that are too narrow; browsers bring no dictionary
 * for sure, and a task's name has no language.
 */
export function syllables(word: string): string[] {
  const [, stem, ending] = BEFORE_ING.exec(word) ?? [];
  if (stem && ending) return [...syllables(stem), ending];
  const letters = [...word];
  const parts: string[] = [];
  let begin = 0;
  let at = 0;
  while (at < letters.length) {
    while (at < letters.length && !isVowel(letters[at] as string)) at += 1;
    while (at < letters.length && isVowel(letters[at] as string)) at += 1;
    let next = at;
    while (next < letters.length && !isVowel(letters[next] as string)) next += 1;
    if (next >= letters.length) break;
    const between = letters.slice(at, next).join("");
    if (between === "") continue;
    const onset = ONSET.exec(between)?.[0] ?? "";
    const cut = next - [...onset].length;
    if (cut - begin >= FEWEST_LETTERS && letters.length - cut >= FEWEST_LETTERS) {
      parts.push(letters.slice(begin, cut).join(""));
      begin = cut;
    }
    at = next;
  }
  parts.push(letters.slice(begin).join(""));
  return parts;
}

/** A name with a hyphen in every place where it may be broken, seen only where it is. */
export const withSoftHyphens = (name: string): string =>
  name.replace(/\p{L}+/gu, (word) => syllables(word).join("\u00ad"));
