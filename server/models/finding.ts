import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { FindingKind, FindingState } from "../../shared/schemas/finding";
import type { NoticeState } from "../../shared/schemas/notice";
import * as column from "./columns";

/** Something the program noticed that a person must act on. */
export class Finding extends Model<InferAttributes<Finding>, InferCreationAttributes<Finding>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare workerId: CreationOptional<string | null>;
  declare jobId: CreationOptional<string | null>;
  declare instrumentId: CreationOptional<string | null>;
  declare kind: FindingKind;
  declare criterion: string;
  declare useKey: string;
  declare state: FindingState;
  declare facts: Record<string, unknown>;
  declare firstDate: string;
  declare lastDate: string;
  declare lastResultId: CreationOptional<string | null>;
  declare daysCount: number;
  declare ownerId: CreationOptional<string | null>;
  declare dueOn: CreationOptional<string | null>;
  declare closedOn: CreationOptional<string | null>;
  declare closingReason: CreationOptional<string | null>;
  declare previousId: CreationOptional<string | null>;
  declare escalatedOn: CreationOptional<string | null>;
  declare escalationId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
  declare openedAt: CreationOptional<Date>;
}

/** A message to a person because of findings, from its writing to its sending. */
export class Notice extends Model<InferAttributes<Notice>, InferCreationAttributes<Notice>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare recipientId: string;
  declare entryId: string;
  declare audience: "officer" | "supervisor" | "worker";
  declare state: NoticeState;
  declare notBefore: CreationOptional<Date>;
  declare tries: number;
  declare messageId: string;
  declare replacesId: CreationOptional<string | null>;
  declare lastError: CreationOptional<string | null>;
  declare attemptedAt: CreationOptional<Date | null>;
  declare sentAt: CreationOptional<Date | null>;
  declare subject: CreationOptional<string | null>;
  declare bodyText: CreationOptional<string | null>;
  declare bodyHtml: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function defineFindingModels(sequelize: Sequelize): void {
  Finding.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      workerId: column.uuidOrNull(),
      jobId: column.uuidOrNull(),
      instrumentId: column.uuidOrNull(),
      kind: column.text(),
      criterion: column.text(),
      useKey: column.text(),
      state: column.text(),
      facts: column.json(),
      firstDate: column.day(),
      lastDate: column.day(),
      lastResultId: column.uuidOrNull(),
      daysCount: column.whole(),
      ownerId: column.uuidOrNull(),
      dueOn: column.dayOrNull(),
      closedOn: column.dayOrNull(),
      closingReason: column.textOrNull(),
      previousId: column.uuidOrNull(),
      escalatedOn: column.dayOrNull(),
      escalationId: column.uuidOrNull(),
      revision: column.revision(),
      openedAt: column.instant(),
    },
    { sequelize, tableName: "findings" },
  );
  Notice.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      recipientId: column.uuid(),
      entryId: column.uuid(),
      audience: column.text(),
      state: column.text(),
      notBefore: column.instant(),
      tries: column.whole(),
      messageId: column.text(),
      replacesId: column.uuidOrNull(),
      lastError: column.textOrNull(),
      attemptedAt: column.instantOrNull(),
      sentAt: column.instantOrNull(),
      subject: column.textOrNull(),
      bodyText: column.textOrNull(),
      bodyHtml: column.textOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "notices" },
  );
}
