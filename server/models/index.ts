import type { Sequelize } from "sequelize";
import { defineSiteModels } from "./site";
import { defineUserModels } from "./user";
import { defineWorkerModels } from "./worker";
import { defineTaskModels } from "./task";
import { defineProtectorModels } from "./protector";
import { defineInstrumentModels } from "./instrument";
import { defineShiftModels } from "./shift";
import { defineFindingModels } from "./finding";

export function defineModels(sequelize: Sequelize): void {
  defineSiteModels(sequelize);
  defineUserModels(sequelize);
  defineWorkerModels(sequelize);
  defineTaskModels(sequelize);
  defineProtectorModels(sequelize);
  defineInstrumentModels(sequelize);
  defineShiftModels(sequelize);
  defineFindingModels(sequelize);
}
