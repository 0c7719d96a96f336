import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { IssueView } from "../../shared/schemas/fit";
import * as column from "./columns";

/** A device handed to a worker. */
export class ProtectorIssue extends Model<
  InferAttributes<ProtectorIssue>,
  InferCreationAttributes<ProtectorIssue>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare workerId: string;
  declare modelId: string;
  declare size: string | null;
  declare assignmentId: string;
  declare issuedOn: string;
  declare acknowledgedAt: CreationOptional<Date | null>;
  declare acknowledgedHow: CreationOptional<IssueView["acknowledgedHow"]>;
  declare endedOn: CreationOptional<string | null>;
  declare endedHow: CreationOptional<IssueView["endedHow"]>;
  declare revision: CreationOptional<number>;
}

export function defineIssueModels(sequelize: Sequelize): void {
  ProtectorIssue.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      workerId: column.uuid(),
      modelId: column.uuid(),
      size: column.textOrNull(),
      assignmentId: column.uuid(),
      issuedOn: column.day(),
      acknowledgedAt: column.instantOrNull(),
      acknowledgedHow: column.textOrNull(),
      endedOn: column.dayOrNull(),
      endedHow: column.textOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "protector_issues" },
  );
}
