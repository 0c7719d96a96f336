/** SQL: a grant of the alias counts at this moment. */
export const inForce = (grant: string): string =>
  `(${grant}.revoked_at IS NULL AND (${grant}.ends_at IS NULL OR ${grant}.ends_at > now()))`;

/** SQL: when the last of a user's grants that had an end was over, by itself or before its time; null where none was. */
export const lastEnd = (user: string): string =>
  `(SELECT max(least(x.ends_at, x.revoked_at)) FROM role_grants x
    WHERE x.user_id = ${user}.id AND x.ends_at IS NOT NULL AND least(x.ends_at, x.revoked_at) <= now())`;
