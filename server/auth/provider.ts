import * as client from "openid-client";
import { Strategy } from "openid-client/passport";
import passport from "passport";
import type { Config } from "../config";

/** The strategy's name with passport. */
export const STRATEGY = "oidc";

/** What the provider says of a person. An e-mail counts only where the provider calls it verified. */
export interface ProviderIdentity {
  issuer: string;
  subject: string;
  email: string | null;
  name: string;
  idToken: string | null;
  /** Groups that the provider states; none where it states none. */
  groups: string[];
}

const GROUPS_AT_MOST = 500;

/** The claim "groups", a list of names; whatever else stands there names no group. */
function groupsIn(claim: unknown): string[] {
  const names = Array.isArray(claim) ? claim : [claim];
  return names
    .filter((name): name is string => typeof name === "string" && name !== "")
    .slice(0, GROUPS_AT_MOST);
}

/** openid-client's strategy, with state and nonce beside PKCE whatever the provider supports. */
class CodeFlow extends Strategy {
  override authorizationRequestParams(
    ...parameters: Parameters<Strategy["authorizationRequestParams"]>
  ) {
    const params = new URLSearchParams(
      super.authorizationRequestParams(...parameters) as URLSearchParams,
    );
    params.set("state", client.randomState());
    params.set("nonce", client.randomNonce());
    return params;
  }
}

export class Provider {
  readonly passport = new passport.Passport();
  private ready: Promise<{ configuration: client.Configuration }> | undefined;

  constructor(private readonly config: Config<"web">) {}

  get origin(): string {
    return new URL(this.config.OIDC_ISSUER).origin;
  }

  /** Discovered at first use, again after a failure: a provider that is down at start does no harm. */
  connect() {
    this.ready ??= this.discover().catch((error) => {
      this.ready = undefined;
      throw error;
    });
    return this.ready;
  }

  private async discover() {
    const { OIDC_ISSUER, OIDC_CLIENT_ID, OIDC_CLIENT_SECRET, OIDC_ALLOW_INSECURE, PUBLIC_URL } =
      this.config;
    const configuration = await client.discovery(
      new URL(OIDC_ISSUER),
      OIDC_CLIENT_ID,
      OIDC_CLIENT_SECRET,
      undefined,
      {
        execute: OIDC_ALLOW_INSECURE ? [client.allowInsecureRequests] : [],
        timeout: 10,
      },
    );
    const strategy = new CodeFlow(
      {
        config: configuration,
        name: STRATEGY,
        sessionKey: "oidc",
        scope: "openid email profile",
        callbackURL: `${PUBLIC_URL}/api/auth/callback`,
      },
      (tokens, verified) => {
        this.identify(configuration, tokens).then(
          (identity) => verified(null, identity),
          (error) => verified(error),
        );
      },
    );
    this.passport.use(STRATEGY, strategy);
    return { configuration };
  }

  private async identify(
    configuration: client.Configuration,
    tokens: client.TokenEndpointResponse & client.TokenEndpointResponseHelpers,
  ): Promise<ProviderIdentity> {
    const claims = tokens.claims();
    if (!claims) throw new Error("the provider sent no identity");
    let person: Record<string, unknown> = claims;
    // Either may stand in the identity itself or behind the provider's address for more.
    const isWhole = person.email !== undefined && person.groups !== undefined;
    if (!isWhole && configuration.serverMetadata().userinfo_endpoint) {
      person = {
        ...claims,
        ...(await client.fetchUserInfo(configuration, tokens.access_token, claims.sub)),
      };
    }
    const isVerified = person.email_verified === true || person.email_verified === "true";
    return {
      issuer: claims.iss,
      subject: claims.sub,
      email: isVerified && typeof person.email === "string" ? person.email : null,
      name: typeof person.name === "string" ? person.name : claims.sub,
      idToken: tokens.id_token ?? null,
      groups: groupsIn(person.groups),
    };
  }

  async signOutUrl(idToken: string | undefined): Promise<string> {
    const home = `${this.config.PUBLIC_URL}/signed-out`;
    try {
      const { configuration } = await this.connect();
      if (!configuration.serverMetadata().end_session_endpoint) return home;
      const parameters: Record<string, string> = { post_logout_redirect_uri: home };
      if (idToken) parameters.id_token_hint = idToken;
      return client.buildEndSessionUrl(configuration, parameters).href;
    } catch {
      return home;
    }
  }
}
