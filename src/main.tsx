import { QueryClientProvider } from "@tanstack/react-query";
import { StrictMode } from "react";
import { createRoot } from "react-dom/client";
import { RouterProvider } from "react-router-dom";
import { LanguageProvider, startI18n } from "./lib/i18n";
import { createQueryClient } from "./lib/query-client";
import { applyTheme, readTheme } from "./lib/theme";
import { createRouter } from "./router";
import "./styles/tokens.css";

async function start() {
  applyTheme(readTheme());
  const root = document.getElementById("root");
  if (!root) throw new Error("The page has no #root");
  const i18n = await startI18n();
  const queryClient = createQueryClient();
  createRoot(root).render(
    <StrictMode>
      <LanguageProvider i18n={i18n}>
        <QueryClientProvider client={queryClient}>
          <RouterProvider router={createRouter(queryClient, i18n)} />
        </QueryClientProvider>
      </LanguageProvider>
    </StrictMode>,
  );
}

void start();
