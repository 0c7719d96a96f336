/** The plain page that the local services share. */

export function escapeHtml(text) {
  const entities = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;", "'": "&#39;" };
  return String(text ?? "").replace(/[&<>"']/g, (character) => entities[character]);
}

/** "de" when the reader prefers German over English, else "en". */
export function readerLanguage(request) {
  const wanted = (request.headers["accept-language"] ?? "")
    .split(",")
    .map((part) => {
      const [tag, quality] = part.trim().split(";q=");
      return { language: tag.slice(0, 2).toLowerCase(), quality: quality ? Number(quality) : 1 };
    })
    .filter(({ language }) => language === "de" || language === "en")
    .sort((a, b) => b.quality - a.quality);
  return wanted[0]?.language ?? "en";
}

export function htmlPage({ language, title, body }) {
  return `<!doctype html>
<html lang="${language}">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="color-scheme" content="light dark">
<title>${escapeHtml(title)}</title>
<link rel="icon" href="data:,">
<style>
:root { --ground: #F5F0E4; --ink: #211D17; --accent: #135A50; --on-accent: #F5F0E4; --faint: #5B5446; --rule: #C9BFA8; }
@media (prefers-color-scheme: dark) {
  :root { --ground: #191713; --ink: #EDE6D8; --accent: #8CCABC; --on-accent: #191713; --faint: #B4AB99; --rule: #4A4437; }
}
* { box-sizing: border-box; }
body { margin: 0; background: var(--ground); color: var(--ink); font: 1rem/1.5 system-ui, sans-serif; }
main { max-width: 46rem; margin: 0 auto; padding: 1.5rem 1rem 3rem; }
h1 { font-size: 1.5rem; line-height: 1.2; margin: 0 0 .75rem; padding-top: .75rem; border-top: 3px solid var(--ink); }
h2 { font-size: 1.125rem; margin: 1.5rem 0 .5rem; }
p { margin: 0 0 1rem; }
a { color: var(--accent); }
ul.rows { list-style: none; margin: 0 0 1.5rem; padding: 0; border-top: 1px solid var(--rule); }
ul.rows > li { display: flex; flex-wrap: wrap; gap: .5rem 1rem; align-items: center; justify-content: space-between; padding: .75rem 0; border-bottom: 1px solid var(--rule); }
ul.rows > li > div { flex: 1 1 14rem; min-width: 0; overflow-wrap: anywhere; }
.faint { color: var(--faint); font-size: .9375rem; }
button { font: inherit; min-height: 2.75rem; padding: .25rem 1rem; border: 1px solid var(--accent); border-radius: 3px; background: var(--accent); color: var(--on-accent); cursor: pointer; }
button.plain { background: transparent; color: var(--accent); }
:focus-visible { outline: 3px solid var(--accent); outline-offset: 2px; }
dl { display: grid; grid-template-columns: max-content 1fr; gap: .25rem 1rem; overflow-wrap: anywhere; }
dt { color: var(--faint); } dd { margin: 0; }
pre { white-space: pre-wrap; overflow-wrap: anywhere; border: 1px solid var(--rule); padding: .75rem; font-size: .9375rem; }
iframe { width: 100%; height: 32rem; border: 1px solid var(--rule); background: #fff; }
</style>
</head>
<body><main>
${body}
</main></body>
</html>
`;
}

/** The fakes stand in for services that a real installation must bring itself. */
export function refuseProduction(what) {
  if (process.env.NODE_ENV !== "production") return;
  console.error(`${what} is for demos and tests and does not start with NODE_ENV=production.`);
  process.exit(1);
}

export function requireVariables(names) {
  const missing = names.filter((name) => !process.env[name]);
  if (missing.length === 0) return;
  console.error(`Missing in the environment: ${missing.join(", ")}`);
  process.exit(1);
}

/** Listens, or ends with one line. */
export function listenOrExit(server, port, host, what) {
  server.on("error", (error) => {
    const reason = error.code === "EADDRINUSE" ? "is in use by another program" : error.code;
    console.error(`${what}: port ${port} ${reason}.`);
    process.exit(1);
  });
  return new Promise((done) => server.listen(port, host, done));
}

export function exitOnSignal(close) {
  for (const signal of ["SIGTERM", "SIGINT", "SIGHUP"]) {
    process.on(signal, async () => {
      await close();
      process.exit(0);
    });
  }
}
