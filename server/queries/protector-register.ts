import type { ProtectorData } from "../../shared/acoustics/types";
import { rows } from "../lib/db";
import { PROTECTOR_COLUMNS, toProtector } from "./day-inputs";

/** The protectors that can be given out on a date, with their data in force. */
export async function registerOn(date: string): Promise<ProtectorData[]> {
  const found = await rows<Parameters<typeof toProtector>[0]>(
    `SELECT DISTINCT ON (m.id) ${PROTECTOR_COLUMNS} FROM protector_models m
     JOIN protector_model_revisions p ON p.model_id = m.id AND p.effective_from <= :date
     WHERE NOT m.is_archived ORDER BY m.id, p.effective_from DESC, p.number DESC`,
    { date },
  );
  return found.map(toProtector).toSorted((a, b) => (a.name < b.name ? -1 : 1));
}
