import type { I18n } from "@lingui/core";
import { ProtectorKindName } from "../../../shared/schemas/evaluation";
import type { Choice } from "../../components/form";
import { protectorKindWord } from "../../lib/register-words";

export const protectorKinds = (i18n: I18n): Choice[] =>
  ProtectorKindName.options.map((kind) => ({ value: kind, label: protectorKindWord(i18n, kind) }));
