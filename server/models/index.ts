import type { Sequelize } from "sequelize";
import { defineFindingModels } from "./finding";
import { defineFitModels } from "./fit";
import { defineInstrumentModels } from "./instrument";
import { defineIssueModels } from "./issue";
import { definePlanModel } from "./plan";
import { defineProtectorModels } from "./protector";
import { defineShiftModels } from "./shift";
import { defineShopFloorModels } from "./shop-floor";
import { defineSiteModels } from "./site";
import { defineSurveyModels } from "./survey";
import { defineTaskModels } from "./task";
import { defineTrainingModels } from "./training";
import { defineUserModels } from "./user";
import { defineWorkerModels } from "./worker";

export function defineModels(sequelize: Sequelize): void {
  defineSiteModels(sequelize);
  defineUserModels(sequelize);
  defineWorkerModels(sequelize);
  defineTaskModels(sequelize);
  definePlanModel(sequelize);
  defineProtectorModels(sequelize);
  defineIssueModels(sequelize);
  defineInstrumentModels(sequelize);
  defineShiftModels(sequelize);
  defineShopFloorModels(sequelize);
  defineFindingModels(sequelize);
  defineFitModels(sequelize);
  defineSurveyModels(sequelize);
  defineTrainingModels(sequelize);
}
