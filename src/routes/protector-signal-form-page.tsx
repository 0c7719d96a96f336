import { useLingui } from "@lingui/react";
import { useNavigate } from "react-router-dom";
import { TextLink } from "../components/link";
import { PageBody, PageHead } from "../components/page";
import { SignalForm } from "../features/signals/signal-form";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";

/** A signal that must be heard, entered for the first time. */
export function Component() {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const choice = useSiteChoice();
  return (
    <PageBody>
      <PageHead
        way={<TextLink to={paths.signals}>{i18n.t("Warning signals")}</TextLink>}
        title={i18n.t("New signal")}
        lead={i18n.t("As it arrives where people work, measured without the noise.")}
      />
      <SignalForm
        signal={null}
        siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
        sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
        onSaved={(id) => void navigate(paths.signal(id))}
        onLeave={() => void navigate(paths.signals)}
      />
    </PageBody>
  );
}
