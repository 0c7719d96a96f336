export * from "../../shared/words/register-words";
