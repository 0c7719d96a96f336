import { useLingui } from "@lingui/react";
import { TextLink } from "../components/link";
import { PageBody, PageHead } from "../components/page";
import { paths } from "../paths";

export function Component() {
  const { i18n } = useLingui();
  return (
    <PageBody>
      <PageHead
        title={i18n.t("There is no such page")}
        lead={i18n.t("The address is wrong, or what it named is gone.")}
      />
      <p>
        <TextLink to={paths.home}>{i18n.t("To your first page")}</TextLink>
      </p>
    </PageBody>
  );
}
