import { queryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { SiteList } from "../../../shared/schemas/site";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

const list = queryOptions({
  queryKey: ["sites-admin", "list"],
  queryFn: ({ signal }) =>
    api.get("/sites", { schema: ownReply<z.infer<typeof SiteList>>("rows", "can"), signal }),
});

export const siteQueries = {
  all: ["sites-admin"] as const,
  list: queryOptions({ ...list, select: ({ rows }) => rows }),
  can: queryOptions({ ...list, select: ({ can }) => can }),
};
