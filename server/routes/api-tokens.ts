import {
  TokenFilter,
  TokenInput,
  TokenList,
  TokenMade,
  TokenView,
} from "../../shared/schemas/api-token";
import { IdParams } from "../../shared/schemas/common";
import { endToken, makeToken } from "../commands/make-token";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { authorize } from "../lib/policy";
import { may, tokenPolicy } from "../policies";
import { listTokens } from "../queries/api-tokens";

/** Tokens with which other systems act as a person. No token opens any of these. */
export function defineApiTokenRoutes(): void {
  endpoint.get(
    "/tokens",
    {
      summary: "One's own tokens for other systems; an administrator's list has everybody's",
      may: may.haveTokens,
      query: TokenFilter,
      reply: TokenList,
    },
    async ({ actor, query }) => ({ rows: await listTokens(actor, { userId: query.userId }) }),
  );

  endpoint.post(
    "/tokens",
    {
      summary: "Make a token for another system; it is shown once",
      may: may.haveTokens,
      body: TokenInput,
      reply: TokenMade,
      isReplySecret: true,
    },
    async ({ actor, body }) => {
      const { id, token } = await makeToken(actor, body);
      return { token, view: only(await listTokens(actor, { id })) };
    },
  );

  endpoint.post(
    "/tokens/:id/end",
    {
      summary: "End a token: it opens nothing from the next request on",
      may: may.haveTokens,
      params: IdParams,
      reply: TokenView,
      status: 200,
    },
    async ({ actor, params }) => {
      const token = only(await listTokens(actor, { id: params.id }));
      authorize(tokenPolicy, actor, "end", token);
      await endToken(actor, token);
      return only(await listTokens(actor, { id: params.id }));
    },
  );
}
