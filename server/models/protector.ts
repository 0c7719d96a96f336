import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { ProtectorKind } from "../../shared/acoustics/types";
import * as column from "./columns";

/** A model on the register; its data are revisions with a date. */
export class ProtectorModel extends Model<
  InferAttributes<ProtectorModel>,
  InferCreationAttributes<ProtectorModel>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare name: string;
  declare kind: ProtectorKind;
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

/** One protector, or two worn together, for a worker and a use. Its dates are a range column. */
export class Assignment extends Model<
  InferAttributes<Assignment>,
  InferCreationAttributes<Assignment>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare workerId: string;
  declare taskId: CreationOptional<string | null>;
  declare areaId: CreationOptional<string | null>;
  declare innerModelId: string;
  declare outerModelId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function defineProtectorModels(sequelize: Sequelize): void {
  ProtectorModel.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      name: column.text(),
      kind: column.text(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "protector_models" },
  );
  Assignment.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      workerId: column.uuid(),
      taskId: column.uuidOrNull(),
      areaId: column.uuidOrNull(),
      innerModelId: column.uuid(),
      outerModelId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "assignments" },
  );
}
