export interface Ports {
  web: number;
  signIn: number;
  smtp: number;
  mails: number;
  client: number;
}

export interface Secrets {
  /** Of this client at the provider. */
  client: string;
  /** Signs sessions. */
  session: string;
  /** Signs what becomes of mails. */
  hook: string;
}

export function applicationEnvironment(options: {
  mode: "development" | "test" | "production";
  cluster: { url(role: "app" | "owner", database: string): string };
  database: string;
  ports: Ports;
  publicUrl: string;
  secrets: Secrets;
  dataDir: string;
}): NodeJS.ProcessEnv;
export function issuerUrl(ports: Pick<Ports, "signIn">): string;
export function providerEnvironment(options: {
  ports: Ports;
  publicUrl: string;
  secrets: Secrets;
  people: string;
  serviceDir: string;
}): NodeJS.ProcessEnv;
export function catcherEnvironment(options: {
  ports: Ports;
  secrets: Pick<Secrets, "hook">;
  serviceDir: string;
}): NodeJS.ProcessEnv;
export const providerScript: string;
export const catcherScript: string;
