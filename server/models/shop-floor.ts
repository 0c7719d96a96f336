import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import * as column from "./columns";

/** A round through the shop, or an own report: who was seen wearing it. */
export class WearingRound extends Model<
  InferAttributes<WearingRound>,
  InferCreationAttributes<WearingRound>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare seenOn: string;
  declare source: "round" | "own-report";
  declare note: string;
  declare struckReason: CreationOptional<string | null>;
  declare authorId: string | null;
  declare revision: CreationOptional<number>;
}

/** A sound that must be heard through noise and protector. Its spectrum is a column of its own. */
export class WarningSignal extends Model<
  InferAttributes<WarningSignal>,
  InferCreationAttributes<WarningSignal>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare name: string;
  declare revision: CreationOptional<number>;
}

export function defineShopFloorModels(sequelize: Sequelize): void {
  WearingRound.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      seenOn: column.day(),
      source: column.text(),
      note: column.text(),
      struckReason: column.textOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "wearing_rounds" },
  );
  WarningSignal.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      name: column.text(),
      revision: column.revision(),
    },
    { sequelize, tableName: "warning_signals" },
  );
}
