import { installDebianPackages } from "./apt.mjs";
import { run } from "./processes.mjs";

/** A program that tests read files back with; Debian's package is installed as root where it is missing. */
export async function ensureProgram(program, packageName) {
  const isThere = async () => (await run("sh", ["-c", `command -v ${program}`])).code === 0;
  if (await isThere()) return program;
  await installDebianPackages([packageName], program);
  if (!(await isThere())) throw new Error(`${packageName} was installed but has no ${program}`);
  return program;
}
