/** A change carries the session's own token, which the cookie shows to scripts of this address alone, in a header. */
export const CSRF_COOKIE = "dinward.csrf";
export const CSRF_HEADER = "x-csrf-token";
