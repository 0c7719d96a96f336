import { IdParams } from "../../shared/schemas/common";
import { DigestInput, DigestView } from "../../shared/schemas/digest";
import {
  MailChoiceInput,
  MailChoiceView,
  SentFilter,
  SentPage,
} from "../../shared/schemas/mail-choice";
import { OwnSettings, UserChange, UserInput, UserList, UserView } from "../../shared/schemas/user";
import { changeUser } from "../commands/change-user";
import { chooseDigest } from "../commands/choose-digest";
import { chooseMails } from "../commands/choose-mails";
import { createUser } from "../commands/create-user";
import { revokeUser } from "../commands/revoke-user";
import { setOwnLanguage } from "../commands/set-own-language";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { User } from "../models/user";
import { may, userPolicy } from "../policies";
import { presentUser } from "../presenters/user";
import { ownDigest } from "../queries/digests";
import { ownMails, sentToMe } from "../queries/mail-choices";
import { listUsers } from "../queries/users";

/** With the reaches of the roles held: what a user's policy looks at. */
const withReaches = async (actor: Actor, id: string) => ({
  id,
  reaches: only(await listUsers(actor, id)).grants.map(({ siteId }) => siteId),
});

const view = async (actor: Actor, id: string) =>
  presentUser(actor, only(await listUsers(actor, id)));

export function defineUserRoutes(): void {
  endpoint.get(
    "/users",
    { summary: "People who may sign in, and their roles", may: may.administer, reply: UserList },
    async ({ actor }) => ({
      rows: (await listUsers(actor)).map((user) => presentUser(actor, user)),
    }),
  );

  endpoint.post(
    "/users",
    { summary: "Grant somebody access", may: may.administer, body: UserInput, reply: UserView },
    async ({ actor, body }) => {
      const user = await createUser(actor, body);
      return view(actor, user.id);
    },
  );

  endpoint.put(
    "/users/:id",
    {
      summary: "Change a person's name, worker and roles; roles are replaced as a whole",
      may: may.administer,
      params: IdParams,
      body: UserChange,
      reply: UserView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const user = await findVisible(User, userPolicy, params.id, actor, { lock: true });
      authorize(userPolicy, actor, "change", await withReaches(actor, user.id));
      await requireRevision(user, ifMatch, () => view(actor, user.id));
      await changeUser(actor, user, body);
      return view(actor, user.id);
    },
  );

  endpoint.post(
    "/users/:id/revoke",
    {
      summary: "End somebody's access at their next request",
      may: may.administer,
      params: IdParams,
      reply: UserView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const user = await findVisible(User, userPolicy, params.id, actor, { lock: true });
      if (user.id === actor.userId) throw new AppError("own-grant", 403);
      authorize(userPolicy, actor, "revoke", await withReaches(actor, user.id));
      await requireRevision(user, ifMatch, () => view(actor, user.id));
      await revokeUser(actor, user);
      return view(actor, user.id);
    },
  );

  endpoint.get(
    "/me/digest",
    { summary: "One's own daily mail about one's crews", may: may.planPeople, reply: DigestView },
    async ({ actor }) => ownDigest(actor),
  );

  endpoint.put(
    "/me/digest",
    {
      summary: "Choose the hour of one's own daily mail, or none",
      may: may.planPeople,
      body: DigestInput,
      reply: DigestView,
      needsRevision: true,
    },
    async ({ actor, body, ifMatch }) => {
      await chooseDigest(actor, body, ifMatch);
      return ownDigest(actor);
    },
  );

  endpoint.get(
    "/me/mails",
    {
      summary: "Which mails one gets, and why some can't be switched off",
      may: may.receiveMails,
      reply: MailChoiceView,
    },
    ({ actor }) => ownMails(actor),
  );

  endpoint.put(
    "/me/mails",
    {
      summary: "Choose the mails that one does without",
      may: may.receiveMails,
      body: MailChoiceInput,
      reply: MailChoiceView,
      needsRevision: true,
    },
    async ({ actor, body, ifMatch }) => {
      await chooseMails(actor, body, ifMatch);
      return ownMails(actor);
    },
  );

  endpoint.get(
    "/me/sent",
    {
      summary: "What was sent to oneself, as it was sent, the latest first",
      may: may.receiveMails,
      query: SentFilter,
      reply: SentPage,
    },
    ({ actor, query }) => sentToMe(actor, query),
  );

  endpoint.put(
    "/me/settings",
    { summary: "One's own language", may: "signed-in", body: OwnSettings, reply: OwnSettings },
    async ({ actor, body }) => {
      await setOwnLanguage(actor, body.language);
      return body;
    },
  );
}
