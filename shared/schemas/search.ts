import { z } from "zod";

export const SearchQuery = z.object({ q: z.string().trim().min(1).max(100) });

export const SearchView = z.object({
  workers: z.array(
    z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string(), siteName: z.string() }),
  ),
  crews: z.array(z.object({ id: z.uuid(), name: z.string(), siteName: z.string() })),
  tasks: z.array(z.object({ id: z.uuid(), name: z.string(), siteName: z.string() })),
  protectors: z.array(z.object({ id: z.uuid(), name: z.string(), kind: z.string() })),
});
export type SearchView = z.infer<typeof SearchView>;
