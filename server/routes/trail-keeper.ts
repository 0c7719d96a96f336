import { KeeperInput, KeeperView } from "../../shared/schemas/trail-keeper";
import { nameTrailKeeper } from "../commands/name-trail-keeper";
import { endpoint } from "../lib/endpoint";
import { authorize } from "../lib/policy";
import { keeperPolicy, may } from "../policies";
import { keeperView } from "../queries/trail-keeper";

/** Who outside gets the trail's head every week. */
export function defineTrailKeeperRoutes(): void {
  endpoint.get(
    "/trail-keeper",
    {
      summary: "Who outside keeps the trail's head, and what was sent there",
      may: may.readTrailKeeper,
      reply: KeeperView,
    },
    ({ actor }) => keeperView(actor),
  );

  endpoint.put(
    "/trail-keeper",
    {
      summary: "Name who outside gets the trail's head every week, or nobody",
      may: may.administer,
      body: KeeperInput,
      reply: KeeperView,
      needsRevision: true,
    },
    async ({ actor, body, ifMatch }) => {
      authorize(keeperPolicy, actor, "change", {});
      await nameTrailKeeper(actor, body, ifMatch);
      return keeperView(actor);
    },
  );
}
