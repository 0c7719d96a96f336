import { useLingui } from "@lingui/react";
import { useConnection } from "../lib/connection";
import { Banner } from "./banner";
import { SignInAgain } from "./problem";

/** Says at the top of the page that the connection or the session is gone; what is typed stays where it is. */
export function ConnectionBanner() {
  const { i18n } = useLingui();
  const state = useConnection();
  if (state === "offline")
    return (
      <Banner title={i18n.t("No connection.")}>
        {i18n.t("What you type is kept on this device.")}
      </Banner>
    );
  if (state === "unavailable")
    return (
      <Banner title={i18n.t("The database can’t be reached.")}>
        {i18n.t("What you type is kept on this device.")}
      </Banner>
    );
  if (state === "session-expired")
    return (
      <Banner title={i18n.t("You have been signed out.")} action={<SignInAgain />}>
        {i18n.t("What you typed is kept on this device.")}
      </Banner>
    );
  if (state === "access-over")
    return (
      <Banner title={i18n.t("You have no access any more.")} action={<SignInAgain />}>
        {i18n.t("An administrator can give it anew. What you typed is kept on this device.")}
      </Banner>
    );
  return null;
}
