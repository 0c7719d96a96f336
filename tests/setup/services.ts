import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import {
  catcherEnvironment,
  catcherScript,
  issuerUrl,
  type Ports,
  providerEnvironment,
  providerScript,
  type Secrets,
} from "../../scripts/lib/environment.mjs";
import { findFreePort, randomPort } from "../../scripts/lib/ports.mjs";
import type { Locale } from "../../shared/i18n";
import { type RunningProcess, startProcess, waitFor } from "./processes";

/** Someone the local provider knows. */
export interface Person {
  sub: string;
  email: string;
  emailVerified: boolean;
  name: string;
  roles: string[];
  groups?: string[];
  language: Locale;
}

export interface Mail {
  id: number;
  receivedAt: string;
  envelope: { from: string; to: string[] };
  messageId: string | null;
  from: string;
  to: string;
  subject: string;
  headers: Record<string, string>;
  text: string;
  html: string | null;
}

export type MailBehaviour = "accept" | "refuse" | "hang" | "drop-after-data" | "fail-once";

/** Where nothing listens. */
export const noPorts: Ports = { web: 1, signIn: 1, smtp: 1, mails: 1, client: 1 };

export async function choosePorts(): Promise<Ports> {
  const chosen: number[] = [];
  for (let count = 0; count < 5; count += 1) {
    chosen.push(await findFreePort(randomPort(), chosen));
  }
  const [web = 0, signIn = 0, smtp = 0, mails = 0, client = 0] = chosen;
  return { web, signIn, smtp, mails, client };
}

/** Makes people known to a provider; each call's people stand beside those of others. */
export function addPeople(peopleFolder: string, people: readonly Person[], name = "people") {
  mkdirSync(peopleFolder, { recursive: true });
  writeFileSync(join(peopleFolder, `${name}.json`), JSON.stringify(people));
}

export async function startProvider(options: {
  ports: Ports;
  publicUrl: string;
  secrets: Secrets;
  people: string;
  serviceDir: string;
}): Promise<RunningProcess & { issuer: string }> {
  const provider = startProcess("sign-in", [providerScript], providerEnvironment(options));
  const issuer = issuerUrl(options.ports);
  await waitFor(`${issuer}/.well-known/openid-configuration`, provider);
  return { ...provider, issuer };
}

export async function startMailCatcher(options: {
  ports: Ports;
  secrets: Pick<Secrets, "hook">;
  serviceDir: string;
}) {
  const catcher = startProcess("mail", [catcherScript], catcherEnvironment(options));
  const mailbox = new Mailbox(`http://127.0.0.1:${options.ports.mails}`);
  await waitFor(`${mailbox.url}/messages`, catcher);
  return { ...catcher, mailbox, smtpUrl: `smtp://127.0.0.1:${options.ports.smtp}` };
}

/** The mails that a catcher has taken. */
export class Mailbox {
  constructor(readonly url: string) {}

  async mails({ to, since = 0 }: { to?: string; since?: number } = {}): Promise<Mail[]> {
    const query = new URLSearchParams({ since: String(since), ...(to ? { to } : {}) });
    const response = await fetch(`${this.url}/messages?${query}`);
    return (await response.json()) as Mail[];
  }

  async clear(): Promise<void> {
    await fetch(`${this.url}/messages`, { method: "DELETE" });
  }

  /** What it reported of mails that came back, with the heads that sign it. */
  async reports(): Promise<{ headers: Record<string, string>; body: string }[]> {
    return (await (await fetch(`${this.url}/reports`)).json()) as {
      headers: Record<string, string>;
      body: string;
    }[];
  }

  async behave(mode: MailBehaviour): Promise<void> {
    const response = await fetch(`${this.url}/behaviour`, {
      method: "POST",
      body: JSON.stringify({ mode }),
    });
    if (!response.ok) throw new Error(await response.text());
  }
}
