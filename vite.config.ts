import tailwindcss from "@tailwindcss/vite";
import react from "@vitejs/plugin-react";
import { defineConfig } from "vite";

/** Where the API runs while the client is served with hot reload; `npm run dev` sets it. */
const apiUrl = process.env.DINWARD_API_URL ?? "http://127.0.0.1:8080";

export default defineConfig({
  plugins: [react(), tailwindcss()],
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
