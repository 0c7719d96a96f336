export * from "../../shared/words/run-words";
