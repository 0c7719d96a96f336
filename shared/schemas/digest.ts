import { z } from "zod";

/** At which hour by the site's clock the mail comes; null: none. */
export const DigestInput = z.object({ hour: z.number().int().min(0).max(23).nullable() });
export type DigestInput = z.infer<typeof DigestInput>;

export const DigestView = DigestInput.extend({
  /** 0 before anything was chosen. */
  revision: z.number(),
  /** Where it goes; null: this person has no address for mail. */
  email: z.string().nullable(),
  /** The latest mail came back undeliverable: what its server said, RFC 3463; null: it did not. */
  bounced: z.string().nullable(),
});
export type DigestView = z.infer<typeof DigestView>;
