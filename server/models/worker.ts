import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { Gear } from "../../shared/schemas/fit";
import * as column from "./columns";

/** Somebody whose exposure is on record. Why there is a personal requirement stands elsewhere. */
export class Worker extends Model<InferAttributes<Worker>, InferCreationAttributes<Worker>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare jobId: CreationOptional<string | null>;
  declare employeeNumber: string;
  declare name: string;
  declare employer: "own" | "agency" | "contractor";
  declare employerName: CreationOptional<string | null>;
  declare language: string;
  declare hiredOn: string;
  declare leftOn: CreationOptional<string | null>;
  declare mustWear: CreationOptional<boolean>;
  declare personalTargetDb: CreationOptional<number | null>;
  declare wornGear: CreationOptional<Gear[]>;
  declare revision: CreationOptional<number>;
}

/** Workers under one or more supervisors; membership is dated. */
export class Crew extends Model<InferAttributes<Crew>, InferCreationAttributes<Crew>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare name: string;
  declare usualStart: string;
  declare usualLengthMin: number;
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

export function defineWorkerModels(sequelize: Sequelize): void {
  Worker.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      jobId: column.uuidOrNull(),
      employeeNumber: column.text(),
      name: column.text(),
      employer: column.text(),
      employerName: column.textOrNull(),
      language: column.text(),
      hiredOn: column.day(),
      leftOn: column.dayOrNull(),
      mustWear: column.flag(),
      personalTargetDb: column.numberOrNull(),
      wornGear: column.texts(),
      revision: column.revision(),
    },
    { sequelize, tableName: "workers" },
  );
  Crew.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      name: column.text(),
      usualStart: column.text(),
      usualLengthMin: column.whole(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "crews" },
  );
}
