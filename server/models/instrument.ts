import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { MeterSettings } from "../../shared/acoustics/types";
import * as column from "./columns";

/** Dosimeter, sound level meter or calibrator. */
export class Instrument extends Model<
  InferAttributes<Instrument>,
  InferCreationAttributes<Instrument>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare kind: "dosimeter" | "sound-level-meter" | "calibrator";
  declare class: "1" | "2";
  declare serialNumber: string;
  declare name: string;
  declare calibrationDueOn: CreationOptional<string | null>;
  declare presets: MeterSettings[];
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

/** Head of a run: one instrument on one worker or place, from out to back. */
export class Run extends Model<InferAttributes<Run>, InferCreationAttributes<Run>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare instrumentId: string;
  declare workerId: CreationOptional<string | null>;
  declare areaId: CreationOptional<string | null>;
  declare shiftId: CreationOptional<string | null>;
  declare surveyId: CreationOptional<string | null>;
  declare taskId: CreationOptional<string | null>;
  declare place: CreationOptional<string | null>;
  declare date: string;
  /** Not back yet: no duration, no reading. */
  declare isOut: CreationOptional<boolean>;
  declare isVoid: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
  declare currentRevisionId: string;
}

export function defineInstrumentModels(sequelize: Sequelize): void {
  Instrument.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      kind: column.text(),
      class: column.text(),
      serialNumber: column.text(),
      name: column.text(),
      calibrationDueOn: column.dayOrNull(),
      presets: column.json(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "instruments" },
  );
  Run.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      instrumentId: column.uuid(),
      workerId: column.uuidOrNull(),
      areaId: column.uuidOrNull(),
      shiftId: column.uuidOrNull(),
      surveyId: column.uuidOrNull(),
      taskId: column.uuidOrNull(),
      place: column.textOrNull(),
      date: column.day(),
      isOut: column.flag(),
      isVoid: column.flag(),
      revision: column.revision(),
      currentRevisionId: column.uuid(),
    },
    { sequelize, tableName: "runs" },
  );
}
