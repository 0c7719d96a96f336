import {
  type CreationOptional,
  type InferAttributes,
  type InferCreationAttributes,
  Model,
  type Sequelize,
} from "sequelize";
import type { HistoryHead, HistoryMapping, HistoryReport } from "../../shared/schemas/history";
import type {
  RecordingAnalysis,
  RecordingCalibration,
  RecordingView,
} from "../../shared/schemas/recording";
import type { RiskFactors } from "../../shared/schemas/survey";
import * as column from "./columns";

/** A change to process, machine, control or pattern of work. */
export class WorkplaceChange extends Model<
  InferAttributes<WorkplaceChange>,
  InferCreationAttributes<WorkplaceChange>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare areaId: CreationOptional<string | null>;
  declare taskId: CreationOptional<string | null>;
  declare jobId: CreationOptional<string | null>;
  declare kind: "process" | "machine" | "control" | "work-pattern";
  declare happenedOn: string;
  declare what: string;
  declare struckReason: CreationOptional<string | null>;
  declare authorId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

/** Runs taken for one purpose with one strategy, on the workers of a job. */
export class Survey extends Model<InferAttributes<Survey>, InferCreationAttributes<Survey>> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare jobId: string;
  declare name: string;
  declare purpose: CreationOptional<string>;
  declare strategy: "task" | "job" | "full-day";
  declare state: CreationOptional<"planned" | "measuring" | "done" | "struck">;
  declare fromDate: string;
  declare toDate: string;
  declare drawSeed: string;
  declare riskFactors: RiskFactors;
  declare closingNote: CreationOptional<string | null>;
  declare authorId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

/** A time history's file on its way in. */
export class HistoryImport extends Model<
  InferAttributes<HistoryImport>,
  InferCreationAttributes<HistoryImport>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare instrumentId: string;
  /** Null once it is cancelled: the file is gone. */
  declare fileId: CreationOptional<string | null>;
  declare fileName: string;
  declare sizeBytes: number;
  declare runId: CreationOptional<string | null>;
  /** Whose new run it becomes, where it belongs to none that is recorded. */
  declare workerId: CreationOptional<string | null>;
  declare state:
    | "uploaded"
    | "reading"
    | "ready"
    | "refused"
    | "storing"
    | "stored"
    | "cancelled"
    | "failed";
  declare head: CreationOptional<HistoryHead | null>;
  declare mapping: CreationOptional<HistoryMapping | null>;
  declare report: CreationOptional<HistoryReport | null>;
  declare answers: CreationOptional<string[]>;
  declare historyId: CreationOptional<string | null>;
  declare authorId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

/** Head of a time history: the levels of one run, one value an interval. */
export class TimeHistory extends Model<
  InferAttributes<TimeHistory>,
  InferCreationAttributes<TimeHistory>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare runId: string;
  declare instrumentId: string;
  declare fileId: string;
  declare startsAt: Date;
  declare intervalMs: number;
  declare valuesCount: number;
  declare isVoid: CreationOptional<boolean>;
  declare revision: CreationOptional<number>;
  declare currentRevisionId: string;
}

/** A sound recording of a task. */
export class Recording extends Model<
  InferAttributes<Recording>,
  InferCreationAttributes<Recording>
> {
  declare id: CreationOptional<string>;
  declare organizationId: string;
  declare siteId: string;
  declare taskId: string;
  declare fileName: string;
  declare state: "uploaded" | "analysing" | "asked" | "analysed" | "failed" | "cancelled";
  declare calibration: RecordingCalibration;
  declare analysis: CreationOptional<RecordingAnalysis | null>;
  declare failure: CreationOptional<RecordingView["failure"]>;
  declare accepted: CreationOptional<RecordingView["accepted"]>;
  /** Of the audio, while it is here. */
  declare fileId: CreationOptional<string | null>;
  declare keepReason: CreationOptional<string | null>;
  declare deleteOn: CreationOptional<string | null>;
  declare authorId: CreationOptional<string | null>;
  declare revision: CreationOptional<number>;
}

export function defineSurveyModels(sequelize: Sequelize): void {
  WorkplaceChange.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      areaId: column.uuidOrNull(),
      taskId: column.uuidOrNull(),
      jobId: column.uuidOrNull(),
      kind: column.text(),
      happenedOn: column.day(),
      what: column.text(),
      struckReason: column.textOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "workplace_changes" },
  );
  Survey.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      jobId: column.uuid(),
      name: column.text(),
      purpose: column.text(),
      strategy: column.text(),
      state: column.text(),
      fromDate: column.day(),
      toDate: column.day(),
      drawSeed: column.text(),
      riskFactors: column.json(),
      closingNote: column.textOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "surveys" },
  );
  HistoryImport.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      instrumentId: column.uuid(),
      fileId: column.uuidOrNull(),
      fileName: column.text(),
      sizeBytes: column.whole(),
      runId: column.uuidOrNull(),
      workerId: column.uuidOrNull(),
      state: column.text(),
      head: column.jsonOrNull(),
      mapping: column.jsonOrNull(),
      report: column.jsonOrNull(),
      answers: column.texts(),
      historyId: column.uuidOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "history_imports" },
  );
  TimeHistory.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      runId: column.uuid(),
      instrumentId: column.uuid(),
      fileId: column.uuid(),
      startsAt: column.instant(),
      intervalMs: column.whole(),
      valuesCount: column.whole(),
      isVoid: column.flag(),
      revision: column.revision(),
      currentRevisionId: column.uuid(),
    },
    { sequelize, tableName: "time_histories" },
  );
  Recording.init(
    {
      id: column.id(),
      organizationId: column.uuid(),
      siteId: column.uuid(),
      taskId: column.uuid(),
      fileName: column.text(),
      state: column.text(),
      calibration: column.json(),
      analysis: column.jsonOrNull(),
      failure: column.jsonOrNull(),
      accepted: column.json(),
      fileId: column.uuidOrNull(),
      keepReason: column.textOrNull(),
      deleteOn: column.dayOrNull(),
      authorId: column.uuidOrNull(),
      revision: column.revision(),
    },
    { sequelize, tableName: "recordings" },
  );
}
