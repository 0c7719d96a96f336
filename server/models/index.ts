import type { Sequelize } from "sequelize";
import { defineFindingModels } from "./finding";
import { defineFitModels } from "./fit";
import { defineInstrumentModels } from "./instrument";
import { defineIssueModels } from "./issue";
import { defineProtectorModels } from "./protector";
import { defineShiftModels } from "./shift";
import { defineShopFloorModels } from "./shop-floor";
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
  defineIssueModels(sequelize);
  defineInstrumentModels(sequelize);
  defineShiftModels(sequelize);
  defineShopFloorModels(sequelize);
  defineFindingModels(sequelize);
  defineFitModels(sequelize);
  defineSurveyModels(sequelize);
}
