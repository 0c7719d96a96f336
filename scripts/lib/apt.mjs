import { Failure } from "./failure.mjs";
import { run } from "./processes.mjs";

export const isRoot = process.getuid?.() === 0;

/** Installs Debian packages when root on Debian; otherwise says the one line to run. */
export async function installDebianPackages(names, what) {
  const line = `apt-get install -y --no-install-recommends ${names.join(" ")}`;
  const hasApt = (await run("apt-get", ["--version"])).code === 0;
  if (!isRoot || !hasApt) {
    throw new Failure(`${what} is missing. Install it, then start again:  sudo ${line}`);
  }
  console.log(`Installing ${what} (${names.join(" ")})`);
  const env = { ...process.env, DEBIAN_FRONTEND: "noninteractive" };
  // Settings laid down before the package keep their place instead of raising a question.
  const args = [...line.split(" ").slice(1), "-o", "Dpkg::Options::=--force-confold"];
  const install = () => run("apt-get", args, { env });
  let result = await install();
  if (result.code !== 0) {
    await run("apt-get", ["update"], { env }); // a machine fresh from its image has no package lists
    result = await install();
  }
  if (result.code !== 0) {
    const reason = result.errors.trim().split("\n").at(-1) ?? "";
    throw new Failure(`${what} could not be installed with «${line}»: ${reason}`);
  }
}
