import { randomBytes } from "node:crypto";

/** A secret that begins with the organization it was made in: where it comes in nobody is signed in. */
export const newSecret = (organizationId: string): string =>
  Buffer.concat([Buffer.from(organizationId.replaceAll("-", ""), "hex"), randomBytes(24)]).toString(
    "base64url",
  );
