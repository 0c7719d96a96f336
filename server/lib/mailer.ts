import { Readable } from "node:stream";
import nodemailer, { type Transporter } from "nodemailer";

export interface OutgoingMail {
  to: string;
  subject: string;
  text: string;
  html: string;
  messageId: string;
}

/** What became of an attempt: taken, refused for now, refused for good, or nobody knows. */
export type MailOutcome = { kind: "sent" } | { kind: "later" | "never" | "unknown"; error: string };

/** @throws Error where the server did not take it for now: the queue tries again later. */
export function retryUnlessSettled(outcome: MailOutcome, what: string): void {
  if (outcome.kind === "later" || outcome.kind === "unknown")
    throw new Error(`the mail server did not take ${what}: ${outcome.error}`);
}

interface SmtpError extends Error {
  code?: string;
  responseCode?: number;
}

export class Mailer {
  private readonly transport: Transporter;

  constructor(
    url: string,
    private readonly from: string,
    /** To whom mails return that can't be delivered; else to the sender. */
    private readonly returnTo?: string,
  ) {
    const { hostname, port, username, password, protocol } = new URL(url);
    const secure = protocol === "smtps:";
    this.transport = nodemailer.createTransport({
      host: hostname,
      port: Number(port || (secure ? 465 : 587)),
      secure,
      ...(username
        ? { auth: { user: decodeURIComponent(username), pass: decodeURIComponent(password) } }
        : {}),
      connectionTimeout: 10_000,
      greetingTimeout: 10_000,
      socketTimeout: 20_000,
    });
  }

  async send({ to, ...mail }: OutgoingMail): Promise<MailOutcome> {
    // A line that breaks is reported alike at every stage. Once the transport reads the message, which it does only when
    // connected and signed in, the server may have it.
    let mayHaveIt = false;
    const text = Readable.from(
      (function* () {
        mayHaveIt = true;
        yield mail.text;
      })(),
    );
    try {
      await this.transport.sendMail({
        ...mail,
        text,
        to,
        from: this.from,
        ...(this.returnTo ? { envelope: { from: this.returnTo, to } } : {}),
        headers: { "Auto-Submitted": "auto-generated" },
      });
      return { kind: "sent" };
    } catch (thrown) {
      const error = thrown as SmtpError;
      const said = [error.code, error.responseCode].filter(Boolean).join(" ") || error.name;
      if (error.responseCode !== undefined)
        return { kind: error.responseCode >= 500 ? "never" : "later", error: said };
      return { kind: mayHaveIt ? "unknown" : "later", error: said };
    }
  }

  close(): void {
    this.transport.close();
  }
}
