import { spawn } from "node:child_process";
import { childEnvironment } from "../config";

/** Runs pg_dump or pg_restore. The password goes by the environment: arguments show in the process list. */
export function runPostgresTool(
  tool: "pg_dump" | "pg_restore",
  databaseUrl: string,
  args: readonly string[],
): Promise<string> {
  const url = new URL(databaseUrl);
  const password = decodeURIComponent(url.password);
  url.password = "";
  const child = spawn(tool, [...args, `--dbname=${url.href}`], {
    env: childEnvironment({ PGPASSWORD: password }),
    stdio: ["ignore", "pipe", "pipe"],
  });
  return finish(tool, child);
}

/** The table of contents of a dump in PostgreSQL's custom format, a line an item. */
export function listDump(file: string): Promise<string> {
  return finish(
    "pg_restore",
    spawn("pg_restore", ["--list", file], { stdio: ["ignore", "pipe", "pipe"] }),
  );
}

function finish(tool: string, child: ReturnType<typeof spawn>): Promise<string> {
  let output = "";
  let errors = "";
  child.stdout?.setEncoding("utf8").on("data", (text: string) => {
    output += text;
  });
  child.stderr?.setEncoding("utf8").on("data", (text: string) => {
    errors += text;
  });
  return new Promise((resolve, reject) => {
    child.on("error", (error: NodeJS.ErrnoException) =>
      reject(
        error.code === "ENOENT"
          ? new Error(
              `${tool} is not on PATH: install PostgreSQL's client programs (Debian: postgresql-client)`,
            )
          : error,
      ),
    );
    child.on("close", (code) => {
      if (code === 0) resolve(output);
      else reject(new Error(errors.trim().split("\n")[0] ?? `${tool} ended with ${code}`));
    });
  });
}
