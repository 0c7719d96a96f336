export * from "../../shared/words/letter-words";
