import type { z } from "zod";
import type { ProtectorKind } from "../../../shared/acoustics/types";
import type { ProtectorView } from "../../../shared/schemas/protector";
import type { TaskView } from "../../../shared/schemas/task";

const PLUGS: ReadonlySet<ProtectorKind> = new Set<ProtectorKind>([
  "foam-plug",
  "premoulded-plug",
  "custom-plug",
  "banded-plug",
  "active-plug",
]);

type Model = Pick<ProtectorView, "id" | "name" | "kind" | "isArchived">;

/** What may be worn together with a protector: a plug under what lies over the ear, and the other way round. */
export function partnersOf<M extends Model>(
  model: Pick<M, "id" | "kind">,
  register: readonly M[],
): M[] {
  return register.filter(
    ({ id, kind, isArchived }) =>
      id !== model.id && !isArchived && PLUGS.has(kind) !== PLUGS.has(model.kind),
  );
}

/** Which of two lies inside: the plug. */
export function worn(
  model: Pick<Model, "id" | "kind">,
  partnerId: string | undefined,
): { innerId: string; outerId: string | undefined } {
  if (partnerId === undefined) return { innerId: model.id, outerId: undefined };
  return PLUGS.has(model.kind)
    ? { innerId: model.id, outerId: partnerId }
    : { innerId: partnerId, outerId: model.id };
}

type Task = z.infer<typeof TaskView>;

/** The task that is looked at before anybody has chosen: the loudest with octave bands, else the loudest. */
export function firstTask(tasks: readonly Task[]): Task | undefined {
  const known = tasks
    .filter(({ level, isArchived }) => level !== null && !isArchived)
    .toSorted((a, b) => (b.level?.levelDb ?? 0) - (a.level?.levelDb ?? 0));
  return known.find(({ level }) => level?.octaveBandsDb != null) ?? known[0];
}
