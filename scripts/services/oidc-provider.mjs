/**
 * The OpenID provider of the demo and the tests: real protocol, real keys, no passwords.
 *
 * Environment: PORT, OIDC_ISSUER, OIDC_CLIENT_ID, OIDC_CLIENT_SECRET, PUBLIC_URL (of the
 * application), DEMO_PEOPLE (a JSON file or a folder of them, read anew at every sign-in),
 * SERVICE_DIR (keeps the keys).
 */
import { generateKeyPairSync, randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from "node:fs";
import { createServer } from "node:http";
import { join } from "node:path";
import Provider, { interactionPolicy } from "oidc-provider";
import {
  escapeHtml,
  exitOnSignal,
  htmlPage,
  listenOrExit,
  readerLanguage,
  refuseProduction,
  requireVariables,
} from "./page.mjs";

refuseProduction("The local sign-in provider");
requireVariables([
  "PORT",
  "OIDC_ISSUER",
  "OIDC_CLIENT_ID",
  "OIDC_CLIENT_SECRET",
  "PUBLIC_URL",
  "DEMO_PEOPLE",
  "SERVICE_DIR",
]);
const { OIDC_ISSUER, OIDC_CLIENT_ID, OIDC_CLIENT_SECRET, PUBLIC_URL, DEMO_PEOPLE, SERVICE_DIR } =
  process.env;
const port = Number(process.env.PORT);

const texts = {
  en: {
    title: "Demo sign-in",
    intro:
      "This page stands in for your organization’s own sign-in. Choose who you are; there are no passwords here.",
    signIn: "Sign in",
    signInAs: (name) => `Sign in as ${name}`,
    refuse: "Refuse to sign in",
    nobody: "Nobody is known here yet: the demo has not been filled.",
    unverified: "e-mail not verified",
    noRole: "no role granted",
    inGroups: (groups) => `in the group ${groups}`,
    expiredTitle: "This sign-in has expired",
    expired: "Go back to Dinward and sign in again.",
    back: "Back to Dinward",
    signOutTitle: "Sign out",
    signOutQuestion: "Sign out of the demo sign-in too?",
    signOut: "Sign out",
    stay: "Stay signed in",
    signedOut: "You are signed out.",
    errorTitle: "Sign-in refused the request",
    roles: {
      officer: "Safety officer",
      supervisor: "Supervisor",
      worker: "Worker",
      auditor: "Auditor",
      administrator: "Administrator",
      representative: "Workers’ representative",
      employer: "Outside employer",
      visitor: "Visitor",
    },
  },
  de: {
    title: "Demo-Anmeldung",
    intro:
      "Diese Seite steht für die Anmeldung Ihrer eigenen Organisation. Wählen Sie, wer Sie sind; Passwörter gibt es hier nicht.",
    signIn: "Anmelden",
    signInAs: (name) => `Anmelden als ${name}`,
    refuse: "Anmeldung ablehnen",
    nobody: "Hier ist noch niemand bekannt: Die Demo ist noch nicht gefüllt.",
    unverified: "E-Mail nicht bestätigt",
    noRole: "keine Rolle vergeben",
    inGroups: (groups) => `in der Gruppe ${groups}`,
    expiredTitle: "Diese Anmeldung ist abgelaufen",
    expired: "Gehen Sie zurück zu Dinward und melden Sie sich neu an.",
    back: "Zurück zu Dinward",
    signOutTitle: "Abmelden",
    signOutQuestion: "Auch von der Demo-Anmeldung abmelden?",
    signOut: "Abmelden",
    stay: "Angemeldet bleiben",
    signedOut: "Sie sind abgemeldet.",
    errorTitle: "Die Anmeldung hat die Anfrage abgelehnt",
    roles: {
      officer: "Sicherheitsfachkraft",
      supervisor: "Aufsichtsperson",
      worker: "Beschäftigte/r",
      auditor: "Prüfer/in",
      administrator: "Administrator/in",
      representative: "Beschäftigtenvertretung",
      employer: "Fremdarbeitgeber",
      visitor: "Besucher/in",
    },
  },
};

function readPeople() {
  if (!existsSync(DEMO_PEOPLE)) return [];
  const files = statSync(DEMO_PEOPLE).isDirectory()
    ? readdirSync(DEMO_PEOPLE)
        .filter((name) => name.endsWith(".json"))
        .map((name) => join(DEMO_PEOPLE, name))
    : [DEMO_PEOPLE];
  return files.flatMap((file) => JSON.parse(readFileSync(file, "utf8")));
}

/** Keys outlive a restart, as a real provider's do. */
function readKeys() {
  mkdirSync(SERVICE_DIR, { recursive: true });
  const file = join(SERVICE_DIR, "provider-keys.json");
  if (existsSync(file)) return JSON.parse(readFileSync(file, "utf8"));
  const { privateKey } = generateKeyPairSync("rsa", { modulusLength: 2048 });
  const key = {
    ...privateKey.export({ format: "jwk" }),
    use: "sig",
    alg: "RS256",
    kid: randomBytes(8).toString("hex"),
  };
  const keys = { jwks: { keys: [key] }, cookieKeys: [randomBytes(32).toString("base64url")] };
  writeFileSync(file, JSON.stringify(keys), { mode: 0o600 });
  return keys;
}

const policy = interactionPolicy.base();
policy.remove("consent"); // the organization's own application needs nobody's consent
policy.add(new interactionPolicy.Prompt({ name: "select_account", requestable: true }), 0);

const { jwks, cookieKeys } = readKeys();
const provider = new Provider(OIDC_ISSUER, {
  jwks,
  cookies: { keys: cookieKeys },
  clients: [
    {
      client_id: OIDC_CLIENT_ID,
      client_secret: OIDC_CLIENT_SECRET,
      client_name: "Dinward",
      // A native client may come back to any port on loopback: a demo's port is chosen at its start.
      application_type: "native",
      redirect_uris: [`${PUBLIC_URL}/api/auth/callback`],
      post_logout_redirect_uris: [`${PUBLIC_URL}/signed-out`],
      grant_types: ["authorization_code"],
      response_types: ["code"],
      token_endpoint_auth_method: "client_secret_post",
    },
  ],
  pkce: { required: () => true },
  claims: {
    openid: ["sub"],
    email: ["email", "email_verified"],
    profile: ["name", "locale", "groups"],
  },
  conformIdTokenClaims: false,
  interactions: { policy, url: (_context, interaction) => `/interaction/${interaction.uid}` },
  features: {
    devInteractions: { enabled: false },
    rpInitiatedLogout: {
      enabled: true,
      logoutSource: showSignOut,
      postLogoutSuccessSource: showSignedOut,
    },
  },
  ttl: {
    AccessToken: 300,
    IdToken: 300,
    AuthorizationCode: 60,
    Interaction: 600,
    Session: 28_800,
    Grant: 28_800,
  },
  findAccount: (_context, sub) => {
    const person = readPeople().find((one) => one.sub === sub);
    if (!person) return undefined;
    return {
      accountId: sub,
      claims: () => ({
        sub,
        email: person.email,
        email_verified: person.emailVerified,
        name: person.name,
        locale: person.language,
        groups: person.groups,
      }),
    };
  },
  async loadExistingGrant(context) {
    const { client, session, provider: own, params } = context.oidc;
    const grant = new own.Grant({ clientId: client.clientId, accountId: session.accountId });
    grant.addOIDCScope(params.scope);
    await grant.save();
    return grant;
  },
  renderError(context, out) {
    const t = texts[readerLanguage(context.req)];
    const detail = [out.error, out.error_description].filter(Boolean).map(escapeHtml).join(": ");
    respond(context, t.errorTitle, `<p>${detail}</p>${backLink(t)}`);
  },
});

function respond(context, title, body, policyAddition = "") {
  context.type = "html";
  context.set(securityHeaders(policyAddition));
  context.body = htmlPage({
    language: readerLanguage(context.req),
    title,
    body: `<h1>${escapeHtml(title)}</h1>${body}`,
  });
}

function securityHeaders(policyAddition = "") {
  return {
    "Content-Security-Policy": `default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; frame-ancestors 'none'${policyAddition}`,
    "Referrer-Policy": "no-referrer",
    "Cache-Control": "no-store",
  };
}

function backLink(t) {
  return `<p><a href="${escapeHtml(PUBLIC_URL)}">${t.back}</a></p>`;
}

/** With a proof of who signs out nobody is asked again; without one a stranger's link could do it. */
function showSignOut(context, form) {
  const t = texts[readerLanguage(context.req)];
  const isProved = context.oidc.entities.IdTokenHint !== undefined;
  const button = `<button type="submit" form="op.logoutForm" name="logout" value="yes" id="sign-out">${t.signOut}</button>`;
  if (!isProved) {
    const stay = `<button class="plain" type="submit" form="op.logoutForm">${t.stay}</button>`;
    respond(context, t.signOutTitle, `<p>${t.signOutQuestion}</p>${form}<p>${button} ${stay}</p>`);
    return;
  }
  const nonce = randomBytes(16).toString("base64");
  const press = `<script nonce="${nonce}">document.getElementById("sign-out").click()</script>`;
  respond(
    context,
    t.signOutTitle,
    `${form}<p>${button}</p>${press}`,
    `; script-src 'nonce-${nonce}'`,
  );
}

function showSignedOut(context) {
  const t = texts[readerLanguage(context.req)];
  respond(context, t.signedOut, backLink(t));
}

function describeRoles(person, t) {
  const roles = (person.roles ?? []).map((role) => t.roles[role] ?? role);
  const notes = [];
  if (person.groups?.length > 0) notes.push(t.inGroups(person.groups.join(", ")));
  else if (roles.length === 0) notes.push(t.noRole);
  if (!person.emailVerified) notes.push(t.unverified);
  return [...roles, ...notes].join(" · ");
}

function peoplePage(uid, t, language) {
  const people = readPeople();
  const row = (person) => `<li>
<div><strong>${escapeHtml(person.name)}</strong><br>
<span>${escapeHtml(describeRoles(person, t))}</span><br><span class="faint">${escapeHtml(person.email)}</span></div>
<form method="post" action="/interaction/${uid}/sign-in">
<button name="sub" value="${escapeHtml(person.sub)}" aria-label="${escapeHtml(t.signInAs(person.name))}">${t.signIn}</button>
</form></li>`;
  const list =
    people.length > 0 ? `<ul class="rows">${people.map(row).join("")}</ul>` : `<p>${t.nobody}</p>`;
  return htmlPage({
    language,
    title: t.title,
    body: `<h1>${t.title}</h1><p>${t.intro}</p>${list}
<form method="post" action="/interaction/${uid}/refuse"><button class="plain">${t.refuse}</button></form>`,
  });
}

async function readForm(request) {
  let text = "";
  for await (const part of request) {
    text += part;
    if (text.length > 10_000) throw new Error("form too large");
  }
  return new URLSearchParams(text);
}

function sendHtml(response, status, html) {
  response.writeHead(status, { "Content-Type": "text/html; charset=utf-8", ...securityHeaders() });
  response.end(html);
}

async function handleInteraction(request, response, uid, action) {
  const language = readerLanguage(request);
  const t = texts[language];
  try {
    await provider.interactionDetails(request, response);
    if (request.method === "GET" && !action) {
      sendHtml(response, 200, peoplePage(uid, t, language));
    } else if (request.method === "POST" && action === "sign-in") {
      const sub = (await readForm(request)).get("sub");
      const isKnown = readPeople().some((person) => person.sub === sub);
      const result = isKnown
        ? { login: { accountId: sub }, select_account: {} }
        : { error: "access_denied", error_description: "this person is not known here" };
      await provider.interactionFinished(request, response, result, {
        mergeWithLastSubmission: false,
      });
    } else if (request.method === "POST" && action === "refuse") {
      const result = { error: "access_denied", error_description: "the person refused to sign in" };
      await provider.interactionFinished(request, response, result, {
        mergeWithLastSubmission: false,
      });
    } else {
      response.writeHead(405).end();
    }
  } catch {
    const body = `<h1>${t.expiredTitle}</h1><p>${t.expired}</p>${backLink(t)}`;
    sendHtml(response, 400, htmlPage({ language, title: t.expiredTitle, body }));
  }
}

const answerProtocol = provider.callback();
const server = createServer(async (request, response) => {
  const { pathname } = new URL(request.url, OIDC_ISSUER);
  const interaction = /^\/interaction\/([\w-]+)(?:\/([\w-]+))?$/.exec(pathname);
  if (interaction) return handleInteraction(request, response, interaction[1], interaction[2]);
  if (pathname === "/demo-people") {
    response.writeHead(200, { "Content-Type": "application/json" });
    return response.end(JSON.stringify(readPeople()));
  }
  return answerProtocol(request, response);
});

exitOnSignal(() => {
  server.closeAllConnections();
  server.close();
});
await listenOrExit(server, port, "127.0.0.1", "The local sign-in provider");
console.log(`The local sign-in provider listens on ${OIDC_ISSUER}`);
