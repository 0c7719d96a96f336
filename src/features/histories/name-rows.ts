/** In one unit of length: how wide a letter is, what stays free between two names, and where the picture ends. */
interface NameRoom {
  readonly letter: number;
  readonly gap: number;
  readonly width: number;
}

/** Names under their brackets in as many rows as it takes that none stands over another, none past the edge. */
export function nameRows(
  names: readonly { from: number; text: string }[],
  { letter, gap, width: end }: NameRoom,
): { x: number; row: number }[] {
  const ends: number[] = [];
  return names.map(({ from, text }) => {
    const width = text.length * letter;
    const x = Math.max(0, Math.min(from, end - width));
    const free = ends.findIndex((taken) => taken + gap <= x);
    const row = free === -1 ? ends.length : free;
    ends[row] = x + width;
    return { x, row };
  });
}
