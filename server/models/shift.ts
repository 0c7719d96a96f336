import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import * as column from "./columns";

/** Head of a shift: identity, current revision, and what the constraints need. */
export class Shift extends Model<InferAttributes<Shift>, InferCreationAttributes<Shift>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare workerId: string;
  declare crewId: CreationOptional<string | null>;
  declare date: string;
  declare localStart: string;
  declare timeZone: string;
  declare lengthMin: number;
  declare startsAt: CreationOptional<Date>;
  declare endsAt: CreationOptional<Date>;
  declare isVoid: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
  declare currentRevisionId: string;
}

export function defineShiftModels(sequelize: Sequelize): void {
  Shift.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      workerId: column.uuid(),
      crewId: column.uuidOrNull(),
      date: column.day(),
      localStart: column.text(),
      timeZone: column.text(),
      lengthMin: column.whole(),
      startsAt: column.instant(),
      endsAt: column.instant(),
      isVoid: column.flag(),
      revision: column.revision(),
      currentRevisionId: column.uuid(),
    },
    { sequelize, tableName: "shifts" },
  );
}
