import { insert, next } from "./insert";
import { buildSite, type Site } from "./site";

export interface Instrument {
  id: string;
  organizationId: string;
  siteId: string;
  serialNumber: string;
}

interface InstrumentOverrides {
  site?: Site;
  kind?: "dosimeter" | "sound-level-meter" | "calibrator";
  serialNumber?: string;
  name?: string;
  calibrationDueOn?: string;
}

export async function buildInstrument(overrides: InstrumentOverrides = {}): Promise<Instrument> {
  const { site = await buildSite(), ...rest } = overrides;
  const { organizationId, id: siteId } = site;
  const count = next();
  const facts = {
    kind: "dosimeter",
    class: "2",
    serialNumber: `serial ${count}`,
    name: `Dosimeter ${count}`,
    ...rest,
  };
  const id = await insert("instruments", { organizationId, siteId, ...facts });
  return { id, organizationId, siteId, serialNumber: facts.serialNumber };
}
