import { execFile } from "node:child_process";
import { join } from "node:path";
import { promisify } from "node:util";
import { expect, test } from "vitest";

test("a file that is not there is said in one line, and is a failure", async () => {
  const failed = promisify(execFile)(
    process.execPath,
    ["--import", "tsx", "scripts/verify-export.ts", "/nowhere/year.zip"],
    { cwd: join(import.meta.dirname, ".."), env: { PATH: process.env.PATH } },
  );
  await expect(failed).rejects.toMatchObject({
    code: 1,
    stderr: "dinward: there is no file at /nowhere/year.zip\n",
  });
});
