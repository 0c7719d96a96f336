import tailwindcss from "@tailwindcss/vite";
import react from "@vitejs/plugin-react";
import { defineConfig, type Plugin } from "vite";
import { compression, defineAlgorithm } from "vite-plugin-compression2";
import { VitePWA } from "vite-plugin-pwa";

/** Where the API runs while the client is served with hot reload; `npm run dev` sets it. */
const apiUrl = process.env.DINWARD_API_URL ?? "http://127.0.0.1:8080";

/** What opens without a connection: the crew's pages, with the words that they load. Everything else stays on the server. */
const OFFLINE_MODULES = [
  /src\/routes\/(crew-sheet-page|wearing-round-page|desk-pages)\.tsx$/,
  /src\/features\/session\/[\w-]+\.tsx$/,
  /i18n\/compiled\/(base|people|register|office|rules)-\w+\.ts$/,
];
const shell = new Set<string>(["index.html", "mark.svg", "manifest.webmanifest"]);

/** Follows the chunks of those pages to all that they import, and notes the files. */
const noteShell: Plugin = {
  name: "note-shell",
  apply: "build",
  generateBundle(_, bundle) {
    const chunks = Object.values(bundle).filter((file) => file.type === "chunk");
    const byName = new Map(chunks.map((chunk) => [chunk.fileName, chunk]));
    const waiting = chunks.filter(
      ({ isEntry, moduleIds }) =>
        isEntry || moduleIds.some((id) => OFFLINE_MODULES.some((pattern) => pattern.test(id))),
    );
    for (let chunk = waiting.pop(); chunk; chunk = waiting.pop()) {
      if (shell.has(chunk.fileName)) continue;
      shell.add(chunk.fileName);
      for (const style of chunk.viteMetadata?.importedCss ?? []) shell.add(style);
      for (const name of chunk.imports) {
        const imported = byName.get(name);
        if (imported) waiting.push(imported);
      }
    }
  },
};

export default defineConfig({
  plugins: [
    react(),
    tailwindcss(),
    noteShell,
    VitePWA({
      strategies: "injectManifest",
      srcDir: "src",
      filename: "service-worker.ts",
      injectRegister: false, // only who has a crew gets it (src/lib/service-worker.ts)
      manifest: false, // public/manifest.webmanifest
      injectManifest: {
        globPatterns: ["**/*.{js,css,html,svg,woff2,webmanifest}"],
        dontCacheBustURLsMatching: /^assets\//,
        manifestTransforms: [
          async (entries) => ({
            manifest: entries.filter(({ url }) => shell.has(url) || /-normal-.*\.woff2$/.test(url)),
          }),
        ],
      },
    }),
    compression({
      include: /\.(js|css|svg|webmanifest)$/,
      algorithms: [defineAlgorithm("gzip", { level: 9 }), "brotliCompress"],
    }),
  ],
  build: {
    outDir: "dist/client",
    manifest: true, // says which script belongs to which page, for the size bench
    target: "es2022",
  },
  server: {
    host: "127.0.0.1",
    strictPort: true,
    proxy: { "/api": apiUrl, "/healthz": apiUrl, "/readyz": apiUrl },
  },
});
