export * from "../../../shared/words/gap-words";
