import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { Gear } from "../../shared/schemas/fit";
import * as column from "./columns";

/** A part of the day with its own noise. */
export class Task extends Model<InferAttributes<Task>, InferCreationAttributes<Task>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare areaId: CreationOptional<string | null>;
  declare name: string;
  declare requiredGear: CreationOptional<Gear[]>;
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

/** A work pattern with its nominal day. */
export class Job extends Model<InferAttributes<Job>, InferCreationAttributes<Job>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare name: string;
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

export function defineTaskModels(sequelize: Sequelize): void {
  Task.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      areaId: column.uuidOrNull(),
      name: column.text(),
      requiredGear: column.texts(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "tasks" },
  );
  Job.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      name: column.text(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "jobs" },
  );
}
