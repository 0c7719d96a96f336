import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { LangSwitch } from "../../components/lang-switch";
import { TextButton, TextLink } from "../../components/link";
import { countUnsent } from "../../lib/kept-list";
import { paths } from "../../paths";
import { keepLanguage, sessionQuery, signOut } from "./session";

/** A choice of one's own, kept with the account. */
export function OwnLanguage() {
  return <LangSwitch onChosen={(locale) => void keepLanguage(locale)} />;
}

/** The account and the way out. */
export function AccountActions() {
  const { i18n } = useLingui();
  const { data } = useQuery(sessionQuery);
  const userId = data?.user?.id;
  const [unsent, setUnsent] = useState(0);

  // Without a connection nobody can be signed out; the top of the page says that there is none.
  const leave = () => void signOut(userId).catch(() => setUnsent(0));
  function ask() {
    const count = userId === undefined ? 0 : countUnsent(localStorage, userId);
    if (count === 0) leave();
    else setUnsent(count);
  }

  return (
    <>
      <TextLink to={paths.account}>{i18n.t("My account")}</TextLink>
      <TextButton onClick={ask}>{i18n.t("Sign out")}</TextButton>
      <Dialog
        isOpen={unsent > 0}
        onClose={() => setUnsent(0)}
        title={i18n.t("Something of yours is not sent yet")}
        lead={i18n.t(
          "{count, plural, one {# thing} other {# things}} that you did wait on this device for a connection. If you sign out, they are deleted here and nobody receives them.",
          { count: unsent },
        )}
        actions={
          <>
            <Button kind="primary" onClick={() => setUnsent(0)}>
              {i18n.t("Stay signed in")}
            </Button>
            <Button onClick={leave}>{i18n.t("Delete them and sign out")}</Button>
          </>
        }
      />
    </>
  );
}
