import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import * as column from "./columns";

/** A place of work with its time zone. */
export class Site extends Model<InferAttributes<Site>, InferCreationAttributes<Site>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare name: string;
  declare timeZone: string;
  declare language: string;
  declare noticeDelayMin: number;
  declare revision: CreationOptional<number>;
}

/** Part of a site; it can be a hearing-protection zone. */
export class Area extends Model<InferAttributes<Area>, InferCreationAttributes<Area>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare name: string;
  declare zone: "none" | "single" | "double";
  declare isArchived: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

export function defineSiteModels(sequelize: Sequelize): void {
  Site.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      name: column.text(),
      timeZone: column.text(),
      language: column.text(),
      noticeDelayMin: column.whole(),
      revision: column.revision(),
    },
    { sequelize, tableName: "sites" },
  );
  Area.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      name: column.text(),
      zone: column.text(),
      isArchived: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "areas" },
  );
}
