import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import * as column from "./columns";

/** Changes that were tried and kept. What they are and do are columns of their own. */
export class Plan extends Model<InferAttributes<Plan>, InferCreationAttributes<Plan>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare name: string;
  declare baseDate: string;
  declare putAsideReason: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

/** A timetable that was asked for. What it rests on and what came of it are columns of their own. */
export class Timetable extends Model<
  InferAttributes<Timetable>,
  InferCreationAttributes<Timetable>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare state: "working" | "answered" | "cancelled" | "failed";
  declare planId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function definePlanModel(sequelize: Sequelize): void {
  Plan.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      name: column.text(),
      baseDate: column.day(),
      putAsideReason: column.textOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "plans" },
  );
  Timetable.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      state: column.text(),
      planId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "timetables" },
  );
}
