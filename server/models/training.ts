import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import * as column from "./columns";

/** A training that was held at a site. */
export class TrainingSession extends Model<
  InferAttributes<TrainingSession>,
  InferCreationAttributes<TrainingSession>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare heldOn: string;
  declare title: string;
  declare fileId: CreationOptional<string | null>;
  declare struckReason: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function defineTrainingModels(sequelize: Sequelize): void {
  TrainingSession.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      heldOn: column.day(),
      title: column.text(),
      fileId: column.uuidOrNull(),
      struckReason: column.textOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "training_sessions" },
  );
}
