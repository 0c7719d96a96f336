import type { I18n } from "@lingui/core";
import type { ProtectorKind } from "../../../shared/acoustics/types";
import { ProtectorKindName } from "../../../shared/schemas/evaluation";
import { protectorKindWord } from "../../../shared/words/register-words";
import type { Choice } from "../../components/form";

export const protectorKinds = (i18n: I18n): Choice[] =>
  ProtectorKindName.options.map((kind) => ({ value: kind, label: protectorKindWord(i18n, kind) }));

const CUPS: readonly ProtectorKind[] = ["earmuff", "helmet-earmuff", "active-earmuff"];
const PLUGS: readonly ProtectorKind[] = [
  "foam-plug",
  "premoulded-plug",
  "custom-plug",
  "banded-plug",
  "active-plug",
];

/** What a kind may have; level-dependent ones and headsets come as cups and as plugs. */
export const hasCushions = (kind: ProtectorKind): boolean => !PLUGS.includes(kind);
export const hasTips = (kind: ProtectorKind): boolean => !CUPS.includes(kind);
export const mayBeActive = (kind: ProtectorKind): boolean =>
  kind === "active-earmuff" ||
  kind === "active-plug" ||
  kind === "level-dependent" ||
  kind === "communication-headset";
