import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import { CalibrationHistory, CalibrationInput } from "../../shared/schemas/outing";
import { InstrumentInput, InstrumentList, InstrumentView } from "../../shared/schemas/run";
import { changeInstrument } from "../commands/change-instrument";
import { createInstrument } from "../commands/create-instrument";
import { recordCalibration } from "../commands/record-calibration";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Instrument } from "../models/instrument";
import { Site } from "../models/site";
import { may, programmePolicy, sitePolicy } from "../policies";
import { presentInstrument } from "../presenters/instrument";
import { calibrationHistory } from "../queries/calibrations";
import { visibleFiles } from "../queries/files";
import { listInstruments } from "../queries/instruments";

const view = async (actor: Actor, id: string) =>
  presentInstrument(actor, only(await listInstruments(actor, { id })));

/** The instrument's site, where this actor may put one. */
async function checkSite(actor: Actor, siteId: string): Promise<void> {
  const site = await findVisible(Site, sitePolicy, siteId, actor);
  authorize(programmePolicy, actor, "change", { siteId: site.id });
}

export function defineInstrumentRoutes(): void {
  endpoint.get(
    "/instruments",
    {
      summary: "Dosimeters, meters and calibrators",
      may: may.readProgramme,
      query: AtSiteQuery,
      reply: InstrumentList,
    },
    async ({ actor, query }) => ({
      rows: (await listInstruments(actor, query)).map((instrument) =>
        presentInstrument(actor, instrument),
      ),
    }),
  );

  endpoint.post(
    "/instruments",
    {
      summary: "Add an instrument",
      may: may.officer,
      body: InstrumentInput,
      reply: InstrumentView,
    },
    async ({ actor, body }) => {
      await checkSite(actor, body.siteId);
      const instrument = await createInstrument(actor, body);
      return view(actor, instrument.id);
    },
  );

  endpoint.put(
    "/instruments/:id",
    {
      summary: "Change an instrument",
      may: may.officer,
      params: IdParams,
      body: InstrumentInput,
      reply: InstrumentView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const instrument = await findVisible(Instrument, programmePolicy, params.id, actor, {
        lock: true,
      });
      authorize(programmePolicy, actor, "change", instrument);
      await requireRevision(instrument, ifMatch, () => view(actor, instrument.id));
      await checkSite(actor, body.siteId);
      await changeInstrument(actor, instrument, body);
      return view(actor, instrument.id);
    },
  );

  endpoint.get(
    "/instruments/:id/calibrations",
    {
      summary: "An instrument's calibrations, and what hangs on the latest",
      may: may.readMeasuring,
      params: IdParams,
      reply: CalibrationHistory,
    },
    async ({ actor, params }) => {
      const instrument = await findVisible(Instrument, programmePolicy, params.id, actor);
      return calibrationHistory(actor, instrument.id);
    },
  );

  endpoint.post(
    "/instruments/:id/calibrations",
    {
      summary: "Record what the laboratory said of an instrument",
      may: may.officer,
      params: IdParams,
      body: CalibrationInput,
      reply: CalibrationHistory,
    },
    async ({ actor, params, body }) => {
      const instrument = await findVisible(Instrument, programmePolicy, params.id, actor, {
        lock: true,
      });
      authorize(programmePolicy, actor, "change", instrument);
      const { certificateFileId } = body;
      if (certificateFileId && (await visibleFiles(actor, [certificateFileId])).length === 0)
        throw notFound();
      const site = await findVisible(Site, sitePolicy, instrument.siteId, actor);
      await recordCalibration(actor, instrument, site, body);
      return calibrationHistory(actor, instrument.id);
    },
  );
}
