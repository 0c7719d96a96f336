import type { z } from "zod";
import type { ProtectorFacts } from "../../shared/schemas/evaluation";
import type { FitDistribution } from "../../shared/schemas/fit";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { fitPolicy } from "../policies";
import { ratesPair } from "./own-attenuation";

type Row = z.infer<typeof FitDistribution>["rows"][number];
type ModelFits = Omit<Row, "labelDb" | "labelMethod"> & { data: ProtectorFacts };

/** Off the number of the US label where it stands for a level in dB(A). @see osha-1910.95 App. B */
const US_C_TO_A_DB = 7;

/**
 * What the label says the model takes off a level in dB(A), which is what a PAR says of one worker: the percentile rating's
 * lower figure (most users reach it), M (a noise with LC − LA = 2 dB), the US number less 7, or the SNR, which comes off
 * a C-weighted level and so is the friendliest of them.
 */
function labelOf({
  percentile,
  mDb,
  usRatingDb,
  snrDb,
}: ProtectorFacts): Pick<Row, "labelDb" | "labelMethod"> {
  if (percentile) return { labelDb: percentile.mostDb, labelMethod: "percentile" };
  if (mDb !== null) return { labelDb: mDb, labelMethod: "hml" };
  if (usRatingDb !== null)
    return { labelDb: usRatingDb - US_C_TO_A_DB, labelMethod: "us-single-number" };
  return { labelDb: snrDb, labelMethod: snrDb === null ? null : "snr" };
}

/** The fits that count, one per worker and model, of whoever is there today. */
export async function fitDistribution(
  actor: Actor,
  siteId: string,
): Promise<z.input<typeof FitDistribution>> {
  const found = await rows<ModelFits>(
    `SELECT m.id AS "modelId", m.name AS "modelName", p.data, count(*) FILTER (WHERE t.has_passed IS FALSE AND (t.need_db IS NULL OR t.need_db > 0))::int AS "failedCount",
       count(*)::int AS count, array_agg(t.par_db ORDER BY t.par_db) AS "parsDb", avg(t.par_db) AS "meanDb", stddev_samp(t.par_db) AS "sdDb"
     FROM (SELECT DISTINCT ON (f.worker_id, f.model_id) f.model_id, v.par_db, v.need_db, v.has_passed
           FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id JOIN workers w ON w.id = f.worker_id
           WHERE f.site_id = :siteId AND NOT f.is_void AND ${ratesPair("v")} AND (w.left_on IS NULL OR w.left_on >= current_date)
             AND ${visible(fitPolicy, actor, "f")}
           ORDER BY f.worker_id, f.model_id, f.tested_on DESC, f.created_at DESC) t
     JOIN protector_models m ON m.id = t.model_id
     CROSS JOIN LATERAL (SELECT r.data FROM protector_model_revisions r WHERE r.model_id = m.id
       ORDER BY r.effective_from > current_date, r.effective_from DESC, r.number DESC LIMIT 1) p
     GROUP BY m.id, p.data ORDER BY m.name, m.id`,
    { siteId },
  );
  return {
    rows: found.map(({ data, ...model }) => ({ ...model, ...labelOf(data) })),
  };
}
