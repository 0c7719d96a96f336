export interface Spread {
  p50: number;
  p95: number;
}

const at = (sorted: readonly number[], share: number) =>
  sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))]!;

/** Both in turn, so that whatever else the machine does falls on both alike. */
export async function measureBeside(
  times: number,
  ours: (index: number) => Promise<unknown>,
  bound: (index: number) => Promise<unknown>,
): Promise<[Spread, Spread]> {
  const taken: [number[], number[]] = [[], []];
  for (let index = -5; index < times; index += 1) {
    for (const [side, work] of [ours, bound].entries()) {
      const began = performance.now();
      await work(Math.abs(index));
      if (index >= 0) taken[side]!.push(performance.now() - began);
    }
  }
  return taken.map(spreadOf) as [Spread, Spread];
}

export function spreadOf(values: readonly number[]): Spread {
  const sorted = values.toSorted((a, b) => a - b);
  return { p50: at(sorted, 0.5), p95: at(sorted, 0.95) };
}

const ms = (value: number) => `${value.toFixed(1)} ms`;

export function title(text: string): void {
  console.log(`\n${text}`);
}

export function line(
  name: string,
  ours: Spread,
  bound: Spread,
  boundName: string,
  goal = "",
): void {
  const spread = ({ p50, p95 }: Spread) => `p50 ${ms(p50)}, p95 ${ms(p95)}`;
  const ratio = `× ${(ours.p50 / bound.p50).toFixed(2)} and × ${(ours.p95 / bound.p95).toFixed(2)}`;
  console.log(
    `  ${name}: ${spread(ours)}; ${boundName}: ${spread(bound)}; ${ratio}${goal && `  (${goal})`}`,
  );
}
