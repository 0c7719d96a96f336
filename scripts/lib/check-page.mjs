import { readFileSync } from "node:fs";
import { join } from "node:path";
import { projectFolder } from "./project.mjs";

/** The offline page as one file: the checker with the arithmetic as one script inside it. */
export async function bundleCheckPage() {
  const { build } = await import("esbuild");
  const { outputFiles } = await build({
    absWorkingDir: projectFolder,
    entryPoints: ["src/check-file/main.ts"],
    bundle: true,
    write: false,
    minify: true,
    format: "iife",
    target: "es2022",
    platform: "browser",
    logLevel: "warning",
  });
  const html = readFileSync(join(projectFolder, "src/check-file/check.html"), "utf8");
  // A script ends at the first such tag, wherever in it that stands.
  const script = outputFiles[0].text.replaceAll("</script", "<\\/script");
  return html.replace("/* script */", () => script);
}
