export * from "../../../shared/surveys/words";
