/**
 * The mail server of the demo and the tests: takes every mail, delivers none, shows them on a page.
 *
 * Environment: SMTP_PORT, PORT (of the page and its JSON), SERVICE_DIR (keeps the mails as files).
 * A mail to an address with "bounce" in it is taken and then comes back: as a delivery-status mail to its return address
 * and as an event. Both are signed with HOOK_SECRET and sent to HOOK_URL, where these are set; GET /reports lists them.
 * Tests make it misbehave with POST /behaviour {"mode": …}.
 */
import { createHmac, randomUUID } from "node:crypto";
import { mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { createServer } from "node:http";
import { join } from "node:path";
import { simpleParser } from "mailparser";
import { SMTPServer } from "smtp-server";
import {
  escapeHtml,
  exitOnSignal,
  htmlPage,
  listenOrExit,
  refuseProduction,
  requireVariables,
} from "./page.mjs";

refuseProduction("The local mail catcher");
requireVariables(["SMTP_PORT", "PORT", "SERVICE_DIR"]);
const folder = join(process.env.SERVICE_DIR, "mails");
const what = "The local mail catcher";

/**
 * accept: as a good server. refuse: 550 for every recipient. hang: takes the mail's data and never
 * answers. drop-after-data: keeps the mail but cuts the line before saying so. fail-once: 451 for
 * the next mail, then accept.
 */
const MODES = ["accept", "refuse", "hang", "drop-after-data", "fail-once"];
let mode = "accept";

mkdirSync(folder, { recursive: true });
const messages = [];
for (const name of readdirSync(folder)
  .filter((file) => file.endsWith(".eml"))
  .sort()) {
  messages.push(await readMessage(name));
}
let lastId = messages.at(-1)?.id ?? 0;

async function readMessage(name) {
  const raw = readFileSync(join(folder, name));
  const envelope = JSON.parse(readFileSync(join(folder, name.replace(/eml$/, "json")), "utf8"));
  const mail = await simpleParser(raw);
  return {
    id: Number.parseInt(name, 10),
    receivedAt: envelope.receivedAt,
    envelope: { from: envelope.from, to: envelope.to },
    messageId: mail.messageId ?? null,
    from: mail.from?.text ?? "",
    to: [mail.to ?? []]
      .flat()
      .map((address) => address.text)
      .join(", "),
    subject: mail.subject ?? "",
    headers: Object.fromEntries(
      mail.headerLines.map(({ key, line }) => [key, line.slice(line.indexOf(":") + 1).trim()]),
    ),
    text: mail.text ?? "",
    html: mail.html || null,
  };
}

async function keep(raw, session) {
  lastId += 1;
  const name = `${String(lastId).padStart(8, "0")}.eml`;
  const envelope = {
    receivedAt: new Date().toISOString(),
    from: session.envelope.mailFrom ? session.envelope.mailFrom.address : "",
    to: session.envelope.rcptTo.map(({ address }) => address),
  };
  writeFileSync(join(folder, name.replace(/eml$/, "json")), JSON.stringify(envelope));
  writeFileSync(join(folder, name), raw);
  const message = await readMessage(name);
  messages.push(message);
  return message;
}

/** What was reported of mails that came back, with the heads that signed it. */
const reports = [];

function signed(type, body) {
  const time = String(Math.floor(Date.now() / 1000));
  const signature = createHmac("sha256", process.env.HOOK_SECRET ?? "")
    .update(`${time}.`)
    .update(body)
    .digest("hex");
  return {
    headers: { "content-type": type, "x-dinward-time": time, "x-dinward-signature": signature },
    body,
  };
}

const NO_MAILBOX = { status: "5.1.1", said: "smtp; 550 5.1.1 no mailbox of that name" };

/** A delivery-status mail (RFC 3464) about a mail that came back, with its head. */
function deliveryStatusMail({ to, from, messageId, subject }) {
  const boundary = `report-${randomUUID()}`;
  return [
    "From: Mail delivery <postmaster@mail.example>",
    `To: <${from}>`,
    "Subject: Undelivered mail",
    `Message-ID: <${randomUUID()}@mail.example>`,
    `Date: ${new Date().toUTCString().replace("GMT", "+0000")}`,
    "Auto-Submitted: auto-replied",
    "MIME-Version: 1.0",
    `Content-Type: multipart/report; report-type=delivery-status; boundary="${boundary}"`,
    "",
    `--${boundary}`,
    "Content-Type: text/plain; charset=utf-8",
    "",
    "Your mail could not be delivered: there is no mailbox of that name.",
    "",
    `--${boundary}`,
    "Content-Type: message/delivery-status",
    "",
    "Reporting-MTA: dns; mail.example",
    "",
    `Final-Recipient: rfc822; ${to}`,
    "Action: failed",
    `Status: ${NO_MAILBOX.status}`,
    `Diagnostic-Code: ${NO_MAILBOX.said}`,
    "",
    `--${boundary}`,
    "Content-Type: text/rfc822-headers",
    "",
    `Message-ID: ${messageId}`,
    `Subject: ${subject}`,
    "",
    `--${boundary}--`,
    "",
  ].join("\r\n");
}

/** Says of a mail that was taken that it came back. */
async function bounce(mail) {
  const to = mail.envelope.to.find((address) => /bounce/i.test(address));
  if (!to) return;
  const { messageId, subject } = mail;
  const text = deliveryStatusMail({
    to,
    from: mail.envelope.from,
    messageId,
    subject: subject.replace(/[^ -~]/g, "?"),
  });
  await keep(Buffer.from(text), {
    envelope: { mailFrom: false, rcptTo: [{ address: mail.envelope.from }] },
  });
  const event = { id: randomUUID(), kind: "bounced", messageId, recipient: to, ...NO_MAILBOX };
  const made = [signed("message/rfc822", text), signed("application/json", JSON.stringify(event))];
  reports.push(...made);
  if (!process.env.HOOK_URL) return;
  for (const { headers, body } of made)
    await fetch(process.env.HOOK_URL, { method: "POST", headers, body }).catch((error) =>
      console.error(`${what}: the report of a mail that came back was not taken: ${error.message}`),
    );
}

function smtpError(responseCode, text) {
  return Object.assign(new Error(text), { responseCode });
}

const smtp = new SMTPServer({
  authOptional: true,
  disabledCommands: ["STARTTLS", "AUTH"], // its certificate would be nobody's
  disableReverseLookup: true,
  closeTimeout: 500,
  onRcptTo(_address, _session, answer) {
    if (mode === "refuse") answer(smtpError(550, "This mailbox is closed for a test"));
    else answer();
  },
  onData(stream, session, answer) {
    const parts = [];
    stream.on("data", (part) => parts.push(part));
    stream.on("end", async () => {
      if (mode === "hang") return;
      if (mode === "fail-once") {
        mode = "accept";
        answer(smtpError(451, "Try again later"));
        return;
      }
      let taken = null;
      try {
        taken = await keep(Buffer.concat(parts), session);
      } catch (error) {
        answer(smtpError(452, `The mail could not be kept: ${error.code ?? error.message}`));
        return;
      }
      if (mode === "drop-after-data") cutLine(session);
      else answer(null, "Kept");
      await bounce(taken);
    });
  },
});
smtp.on("error", (error) => {
  if (error.syscall !== "listen") return; // a sender that goes away is the sender's business
  const reason = error.code === "EADDRINUSE" ? "is in use by another program" : error.code;
  console.error(`${what}: port ${process.env.SMTP_PORT} ${reason}.`);
  process.exit(1);
});

function cutLine(session) {
  for (const connection of smtp.connections) {
    if (connection.session.id === session.id) connection._socket.destroy();
  }
}

function sendJson(response, status, value) {
  response.writeHead(status, { "Content-Type": "application/json", "Cache-Control": "no-store" });
  response.end(JSON.stringify(value));
}

function sendHtml(response, title, body) {
  response.writeHead(200, {
    "Content-Type": "text/html; charset=utf-8",
    "Content-Security-Policy":
      "default-src 'none'; style-src 'unsafe-inline'; img-src data:; frame-src 'self'; frame-ancestors 'self'",
    "Cache-Control": "no-store",
  });
  response.end(htmlPage({ language: "en", title, body: `<h1>${escapeHtml(title)}</h1>${body}` }));
}

function listPage() {
  const row = (
    message,
  ) => `<li><div><a href="/mail/${message.id}">${escapeHtml(message.subject || "(no subject)")}</a><br>
<span class="faint">to ${escapeHtml(message.envelope.to.join(", "))} · ${escapeHtml(message.receivedAt)}</span></div></li>`;
  if (messages.length === 0) return "<p>No mail has been sent yet.</p>";
  return `<ul class="rows">${messages.map(row).reverse().join("")}</ul>`;
}

function mailPage(message) {
  const html = message.html
    ? `<h2>As HTML</h2><iframe sandbox src="/mail/${message.id}/html" title="The mail as HTML"></iframe>`
    : "";
  return `<p><a href="/">All mails</a> · <a href="/mail/${message.id}/raw">Source</a></p>
<dl><dt>From</dt><dd>${escapeHtml(message.from)}</dd><dt>To</dt><dd>${escapeHtml(message.to)}</dd>
<dt>Received</dt><dd>${escapeHtml(message.receivedAt)}</dd></dl>
<h2>As text</h2><pre>${escapeHtml(message.text)}</pre>${html}`;
}

function deleteAll() {
  messages.length = 0;
  for (const name of readdirSync(folder)) rmSync(join(folder, name));
}

async function readJson(request) {
  let text = "";
  for await (const part of request) text += part;
  return JSON.parse(text);
}

/** `since`: the id of the last message already seen. `to`: a recipient's address. */
function filterMessages(query) {
  const since = Number(query.get("since") ?? 0);
  const to = query.get("to")?.toLowerCase();
  return messages.filter(
    (message) =>
      message.id > since &&
      (!to || message.envelope.to.some((address) => address.toLowerCase() === to)),
  );
}

async function handle(request, response) {
  const url = new URL(request.url, "http://localhost");
  const route = `${request.method} ${url.pathname}`;
  if (route === "GET /") return sendHtml(response, "Mails of the demo", listPage());
  if (route === "GET /messages") return sendJson(response, 200, filterMessages(url.searchParams));
  if (route === "GET /reports") return sendJson(response, 200, reports);
  if (route === "DELETE /messages") {
    deleteAll();
    return sendJson(response, 200, []);
  }
  if (route === "GET /behaviour") return sendJson(response, 200, { mode });
  if (route === "POST /behaviour") {
    const wanted = (await readJson(request)).mode;
    if (!MODES.includes(wanted))
      return sendJson(response, 400, { error: `mode is one of ${MODES.join(", ")}` });
    mode = wanted;
    return sendJson(response, 200, { mode });
  }
  const [, id, form] = /^GET \/mail\/(\d+)(?:\/(html|raw))?$/.exec(route) ?? [];
  const message = messages.find((one) => one.id === Number(id));
  if (!message) return sendJson(response, 404, { error: "not found" });
  if (!form) return sendHtml(response, message.subject || "(no subject)", mailPage(message));
  const isHtml = form === "html";
  response.writeHead(200, {
    "Content-Type": `text/${isHtml ? "html" : "plain"}; charset=utf-8`,
    "Content-Security-Policy":
      "sandbox; default-src 'none'; style-src 'unsafe-inline'; img-src data:",
  });
  return response.end(
    isHtml
      ? message.html
      : readFileSync(join(folder, `${String(message.id).padStart(8, "0")}.eml`)),
  );
}

const web = createServer((request, response) => {
  handle(request, response).catch((error) => sendJson(response, 400, { error: error.message }));
});

exitOnSignal(() => {
  web.closeAllConnections();
  web.close();
  for (const connection of smtp.connections) connection._socket.destroy();
  smtp.close();
});
smtp.listen(Number(process.env.SMTP_PORT), "127.0.0.1");
await listenOrExit(web, Number(process.env.PORT), "127.0.0.1", what);
console.log(`${what} shows mails on http://127.0.0.1:${process.env.PORT}`);
