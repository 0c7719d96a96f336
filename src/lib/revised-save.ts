import { useMutation } from "@tanstack/react-query";
import { useState } from "react";
import { api, type ReplySchema } from "./api";
import { savedMeanwhile } from "./stale";

/** Two people changed the same record: what is being saved, and what was saved in between. */
export interface Conflict<Body, View> {
  readonly mine: Body;
  readonly saved: View;
}

/** Saves a record as a change of the revision that was seen; a stale one becomes a conflict to be settled. */
export function useRevisedSave<Body, View extends { revision: number }>({
  path,
  schema,
  method = "put",
  onSaved,
  onError,
}: {
  path: (body: Body) => string;
  schema: ReplySchema<View>;
  method?: "put" | "patch";
  onSaved: (view: View) => void;
  onError?: (error: unknown) => void;
}) {
  const [conflict, setConflict] = useState<Conflict<Body, View> | null>(null);
  const mutation = useMutation({
    mutationFn: ({ body, revision }: { body: Body; revision: number }) =>
      api[method](path(body), { body, ifMatch: String(revision), schema }),
    onSuccess: (view) => {
      setConflict(null);
      onSaved(view);
    },
    onError: (error, { body }) => {
      const saved = savedMeanwhile(error, schema);
      if (saved) setConflict({ mine: body, saved });
      else onError?.(error);
    },
  });
  return {
    save: (body: Body, revision: number) => mutation.mutate({ body, revision }),
    isSaving: mutation.isPending,
    error: conflict ? null : mutation.error,
    conflict,
    leaveConflict: () => setConflict(null),
  };
}
