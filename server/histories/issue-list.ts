import type { HistoryIssue } from "../../shared/schemas/history";

/** As many of one kind are listed one by one; of the others only how many there are. */
const LISTED_OF_A_KIND = 20;
const LISTED = 200;

/** What a file's reading has to say, bounded however bad the file is. */
export class IssueList {
  readonly listed: HistoryIssue[] = [];
  count = 0;
  refusedCount = 0;
  private readonly ofKind = new Map<string, number>();

  add(
    severity: HistoryIssue["severity"],
    code: string,
    line: number,
    params: HistoryIssue["params"] = {},
    column: string | null = null,
  ): void {
    this.count += 1;
    if (severity === "refused") this.refusedCount += 1;
    const known = this.ofKind.get(code) ?? 0;
    this.ofKind.set(code, known + 1);
    if (known < LISTED_OF_A_KIND && this.listed.length < LISTED)
      this.listed.push({ line, column, code, params, severity });
  }
}
