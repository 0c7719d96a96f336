import { createHash, randomBytes } from "node:crypto";

/** A secret that begins with the organization it was made in: where it comes in nobody is signed in. */
export const newSecret = (organizationId: string): string =>
  Buffer.concat([Buffer.from(organizationId.replaceAll("-", ""), "hex"), randomBytes(24)]).toString(
    "base64url",
  );

/** What is kept of a secret. */
export const secretHash = (secret: string): Buffer => createHash("sha256").update(secret).digest();

/** The organization that a secret was made in, which it begins with; null where it is none of ours. */
export function organizationOfSecret(secret: string): string | null {
  const bytes = Buffer.from(secret, "base64url");
  if (bytes.length !== 40) return null;
  const hex = bytes.subarray(0, 16).toString("hex");
  return hex.replace(/^(.{8})(.{4})(.{4})(.{4})(.{12})$/, "$1-$2-$3-$4-$5");
}
