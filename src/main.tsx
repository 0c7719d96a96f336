import { QueryClientProvider } from "@tanstack/react-query";
import { StrictMode } from "react";
import { createRoot } from "react-dom/client";
import { watchRoles } from "./features/session/session";
import { watchConnection } from "./lib/connection";
import { LanguageProvider, startI18n } from "./lib/i18n";
import { createQueryClient } from "./lib/query-client";
import { applyTheme, readTheme } from "./lib/theme";
import { createRoutes, Router } from "./router";
import "./styles/tokens.css";

async function start() {
  applyTheme(readTheme());
  const root = document.getElementById("root");
  if (!root) throw new Error("The page has no #root");
  const i18n = await startI18n();
  const queryClient = createQueryClient();
  watchConnection(queryClient);
  watchRoles(queryClient);
  const routes = createRoutes(queryClient, i18n);
  createRoot(root).render(
    <StrictMode>
      <LanguageProvider i18n={i18n}>
        <QueryClientProvider client={queryClient}>
          <Router routes={routes} />
        </QueryClientProvider>
      </LanguageProvider>
    </StrictMode>,
  );
}

void start();
