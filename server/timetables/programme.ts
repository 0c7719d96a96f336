import type { Highs } from "highs";

/** A linear programme in whole numbers that grows row by row. */
export class Programme {
  private readonly cost: number[] = [];
  private readonly lower: number[] = [];
  private readonly upper: number[] = [];
  private readonly isWhole: number[] = [];
  private readonly starts: number[] = [0];
  private readonly indices: number[] = [];
  private readonly values: number[] = [];
  private readonly rowLower: number[] = [];
  private readonly rowUpper: number[] = [];

  constructor(private readonly highs: Highs) {}

  column(lower: number, upper: number, { cost = 0, isWhole = true } = {}): number {
    this.cost.push(cost);
    this.lower.push(lower);
    this.upper.push(upper);
    this.isWhole.push(isWhole ? 1 : 0);
    return this.cost.length - 1;
  }

  row(
    lower: number,
    upper: number,
    entries: readonly (readonly [column: number, factor: number])[],
  ): void {
    for (const [column, factor] of entries) {
      if (factor === 0) continue;
      this.indices.push(column);
      this.values.push(factor);
    }
    this.starts.push(this.indices.length);
    this.rowLower.push(lower);
    this.rowUpper.push(upper);
  }

  /**
   * Solves it. `values` is null where none was found, and `isImpossible` says that there are none; `bound` is what the
   * least objective can't fall below.
   */
  solve({
    seconds,
    start = null,
    isRelaxed = false,
    goodEnough = 0,
    onBeat = () => undefined,
  }: {
    seconds: number;
    /** A solution that is known. */
    start?: readonly number[] | null;
    /** Not in whole numbers: quick, and its least is a bound all the same. */
    isRelaxed?: boolean;
    /** After a third of the time, a gap of this share of the objective ends it. */
    goodEnough?: number;
    /** Called while it is at work, with the seconds spent. */
    onBeat?: (spentS: number) => void;
  }): { values: number[] | null; isImpossible: boolean; bound: number } {
    const { highs } = this;
    const numCols = this.cost.length;
    const numRows = this.rowLower.length;
    const { callbackType, modelStatus } = highs.constants;
    return highs.withModel(
      {
        numCols,
        numRows,
        colCost: this.cost,
        colLower: this.lower,
        colUpper: this.upper,
        rowLower: this.rowLower,
        rowUpper: this.rowUpper,
        ...(!isRelaxed && { integrality: Int32Array.from(this.isWhole) }),
        matrix: {
          format: "csr",
          numRows,
          numCols,
          starts: Int32Array.from(this.starts),
          indices: Int32Array.from(this.indices),
          values: Float64Array.from(this.values),
        },
      },
      (model) => {
        model.options.set({
          output_flag: false,
          time_limit: seconds,
          mip_rel_gap: 0,
          mip_abs_gap: 1e-9,
          random_seed: 1,
        });
        if (start) model.setSolution({ colValue: start });
        const began = performance.now();
        model.run({
          [callbackType.mipInterrupt](event) {
            const spentS = (performance.now() - began) / 1000;
            onBeat(spentS);
            const { mip_primal_bound: least, mip_dual_bound: bound } = event.data;
            if (goodEnough === 0 || spentS < seconds / 3 || least === undefined) return;
            if (bound !== undefined && least - bound <= goodEnough * Math.abs(least))
              event.interrupt();
          },
        });
        const status = model.getModelStatus();
        // No objective here falls without end.
        if (status === modelStatus.infeasible || status === modelStatus.unboundedOrInfeasible)
          return { values: null, isImpossible: true, bound: Number.POSITIVE_INFINITY };
        const hasValues = model.info.get("primal_solution_status") === 2;
        const values = hasValues ? [...model.getSolution().colValue] : null;
        if (isRelaxed)
          return {
            values,
            isImpossible: false,
            bound: status === modelStatus.optimal ? model.getObjectiveValue() : 0,
          };
        return { values, isImpossible: false, bound: Number(model.info.get("mip_dual_bound")) };
      },
    );
  }
}
