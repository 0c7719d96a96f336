import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { Ear } from "../../shared/schemas/fit";
import type {
  CheckAnalysis,
  CheckCalibration,
  CheckPart,
  CheckSpectrum,
  Correction,
  MicrophoneCheckView,
} from "../../shared/schemas/microphone-check";
import * as column from "./columns";

/** Head of a fit test: what a model takes off on one worker, measured on one day. */
export class FitTest extends Model<InferAttributes<FitTest>, InferCreationAttributes<FitTest>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare workerId: string;
  declare modelId: string;
  declare testedOn: string;
  declare isVoid: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
}

/** Recordings from outside and inside the cup, on their way to a fit test. */
export class MicrophoneCheck extends Model<
  InferAttributes<MicrophoneCheck>,
  InferCreationAttributes<MicrophoneCheck>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare workerId: string;
  declare modelId: string;
  declare ear: Ear;
  declare parts: CheckPart[];
  declare calibration: CheckCalibration;
  declare correction: Correction;
  declare spectrum: CreationOptional<CheckSpectrum | null>;
  declare state: MicrophoneCheckView["state"];
  declare analysis: CreationOptional<CheckAnalysis | null>;
  declare failure: CreationOptional<MicrophoneCheckView["failure"]>;
  declare fitTestId: CreationOptional<string | null>;
  declare authorId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function defineFitModels(sequelize: Sequelize): void {
  FitTest.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      workerId: column.uuid(),
      modelId: column.uuid(),
      testedOn: column.day(),
      isVoid: column.flag(),
      revision: column.revision(),
    },
    { sequelize, tableName: "fit_tests" },
  );
  MicrophoneCheck.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      workerId: column.uuid(),
      modelId: column.uuid(),
      ear: column.text(),
      parts: column.json(),
      calibration: column.json(),
      correction: column.json(),
      spectrum: column.jsonOrNull(),
      state: column.text(),
      analysis: column.jsonOrNull(),
      failure: column.jsonOrNull(),
      fitTestId: column.uuidOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "microphone_checks" },
  );
}
