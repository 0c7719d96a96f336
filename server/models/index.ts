import type { Sequelize } from "sequelize";
import { defineFindingModels } from "./finding";
import { defineInstrumentModels } from "./instrument";
import { defineProtectorModels } from "./protector";
import { defineShiftModels } from "./shift";
import { defineSiteModels } from "./site";
import { defineSurveyModels } from "./survey";
import { defineTaskModels } from "./task";
import { defineUserModels } from "./user";
import { defineWorkerModels } from "./worker";

export function defineModels(sequelize: Sequelize): void {
  defineSiteModels(sequelize);
  defineUserModels(sequelize);
  defineWorkerModels(sequelize);
  defineTaskModels(sequelize);
  defineProtectorModels(sequelize);
  defineInstrumentModels(sequelize);
  defineShiftModels(sequelize);
  defineFindingModels(sequelize);
  defineSurveyModels(sequelize);
}
