import { useLingui } from "@lingui/react";
import { useQueryErrorResetBoundary } from "@tanstack/react-query";
import { Component, lazy, type ReactNode, useEffect } from "react";
import { Outlet, useLocation } from "react-router-dom";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Page, PageBody, PageHead, RunningHead } from "../components/page";
import { isNoSuchAddress } from "../lib/no-such-address";
import { problemText } from "../lib/problem-text";
import { paths } from "../paths";

/** What stands in place of a page that broke: what happened, and what still holds. */
function RouteError({ error }: { error: unknown }) {
  const { i18n } = useLingui();
  return (
    <PageBody>
      <PageHead title={i18n.t("This page could not be shown")} />
      <Failed onRetry={() => window.location.reload()}>{problemText(i18n, error)}</Failed>
      <p>
        <TextLink to={paths.home}>{i18n.t("To your first page")}</TextLink>
      </p>
    </PageBody>
  );
}

const NotFound = lazy(() => import("./not-found").then((page) => ({ default: page.Component })));

/** A page of something that is not there. Whoever comes back to the address asks the server again. */
function NoSuchAddress() {
  const { reset } = useQueryErrorResetBoundary();
  useEffect(reset, [reset]);
  return <NotFound />;
}

interface Caught {
  readonly failed: { readonly error: unknown } | null;
  readonly at: string;
}

class Boundary extends Component<{ at: string; isOuter: boolean; children: ReactNode }, Caught> {
  override state: Caught = { failed: null, at: this.props.at };

  static getDerivedStateFromError(error: unknown): Partial<Caught> {
    return { failed: { error } };
  }

  /** Another address is another try. */
  static getDerivedStateFromProps({ at }: { at: string }, before: Caught): Caught | null {
    return at === before.at ? null : { failed: null, at };
  }

  override render() {
    const { failed } = this.state;
    if (!failed) return this.props.children;
    const { error } = failed;
    const words = isNoSuchAddress(error) ? <NoSuchAddress /> : <RouteError error={error} />;
    return this.props.isOuter ? <Page head={<RunningHead />}>{words}</Page> : words;
  }
}

/** Around everything, and around the pages behind the sign-in, so that their head stays. */
export function RouteErrorBoundary({ children }: { children?: ReactNode }) {
  return (
    <Boundary at={useLocation().key} isOuter={children !== undefined}>
      {children ?? <Outlet />}
    </Boundary>
  );
}
