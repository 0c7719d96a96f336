import { useMutation } from "@tanstack/react-query";
import { useState } from "react";
import { api, type ReplySchema } from "./api";
import { useOneAtATime } from "./one-at-a-time";
import { isSameValue } from "./same-value";
import { savedMeanwhile } from "./stale";

/** Two people changed the same record: what is being saved, and what was saved in between. */
export interface Conflict<Body, View> {
  readonly mine: Body;
  readonly saved: View;
}

/**
 * Saves a record as a change of the revision that was seen; a stale one becomes a conflict to be settled, unless what was
 * saved in between is what was to be saved.
 */
export function useRevisedSave<Body, View extends { revision: number }>({
  path,
  schema,
  method = "put",
  toBody,
  onSaved,
  onError,
}: {
  path: (body: Body) => string;
  schema: ReplySchema<View>;
  method?: "put" | "patch";
  /** What a body states of the saved record: its values, and not why they were changed. */
  toBody: (saved: View) => Partial<Body>;
  onSaved: (view: View) => void;
  onError?: (error: unknown) => void;
}) {
  const [conflict, setConflict] = useState<Conflict<Body, View> | null>(null);
  const { begin, end } = useOneAtATime();
  const mutation = useMutation({
    mutationFn: async ({ body, revision }: { body: Body; revision: number }) => {
      try {
        return await api[method](path(body), { body, ifMatch: String(revision), schema });
      } catch (error) {
        const saved = savedMeanwhile(error, schema);
        if (saved && statesTheSame(body, toBody(saved))) return saved;
        throw error;
      }
    },
    onSuccess: (view) => {
      setConflict(null);
      onSaved(view);
    },
    onError: (error, { body }) => {
      const saved = savedMeanwhile(error, schema);
      if (saved) setConflict({ mine: body, saved });
      else onError?.(error);
    },
    onSettled: end,
  });
  return {
    save: (body: Body, revision: number) => {
      if (begin()) mutation.mutate({ body, revision });
    },
    isSaving: mutation.isPending,
    error: conflict ? null : mutation.error,
    conflict,
    leaveConflict: () => setConflict(null),
  };
}

function statesTheSame<Body>(mine: Body, theirs: Partial<Body>): boolean {
  return (Object.keys(theirs) as (keyof Body)[]).every((key) =>
    isSameValue(mine[key], theirs[key]),
  );
}
