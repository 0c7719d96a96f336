import { useLingui } from "@lingui/react";
import { LangSwitch } from "../../components/lang-switch";
import { TextButton } from "../../components/link";
import { keepLanguage, signOut } from "./session";

export function AccountActions() {
  const { i18n } = useLingui();
  return (
    <>
      <LangSwitch onChosen={(locale) => void keepLanguage(locale)} />
      <TextButton onClick={() => void signOut()}>{i18n.t("Sign out")}</TextButton>
    </>
  );
}
