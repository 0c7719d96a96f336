import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { type ReactNode, useState } from "react";
import type { z } from "zod";
import { ChangePreview } from "../../shared/schemas/site";
import { ApiError, api, type ReplySchema } from "../lib/api";
import { useChangeKey } from "../lib/change-key";
import { useOneAtATime } from "../lib/one-at-a-time";
import { paths } from "../paths";
import { Button } from "./button";
import { ChangeReview, useChangePreview } from "./change-preview";
import { FormActions, SubmitButton } from "./form";
import { FormProblem } from "./form-problem";
import { Status } from "./status";

/** The steps of a change that moves verdicts: filled in, looked at with who changes verdict, then saved once. */
export function useReviewedChange<Body extends object, View>({
  path,
  schema,
  onError,
  onSaved,
}: {
  /** Where it is saved; what it would do is asked of the same address with `/preview`. */
  path: string;
  schema: ReplySchema<View>;
  onError: (error: unknown) => void;
  onSaved: (view: View) => void;
}) {
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const [reviewed, setReviewed] = useState<{
    body: Body;
    preview: z.infer<typeof ChangePreview>;
  } | null>(null);
  const preview = useChangePreview(`${path}/preview`, ChangePreview, onError);
  const { begin, end } = useOneAtATime();
  const save = useMutation({
    mutationFn: (body: Body) =>
      api.post(path, { body, schema, idempotencyKey: changeKey.keyFor(body) }),
    onSuccess: (view) => {
      changeKey.forget();
      void client.invalidateQueries({ queryKey: ["recompute-progress"] });
      onSaved(view);
    },
    onError: (error) => {
      // What is wrong stands at its field: back to the form.
      if (error instanceof ApiError && error.issues.length > 0) setReviewed(null);
      onError(error);
    },
    onSettled: end,
  });
  return {
    preview,
    save: {
      error: save.error,
      isPending: save.isPending,
      mutate: (body: Body) => {
        if (begin()) save.mutate(body);
      },
    },
    reviewed,
    /** `asked`: what the preview is asked with, where that is not the whole body. */
    look: (body: Body, asked: object = body) =>
      preview.mutate(asked, { onSuccess: (found) => setReviewed({ body, preview: found }) }),
    back: () => setReviewed(null),
  };
}

type Change<Body extends object> = Pick<
  ReturnType<typeof useReviewedChange<Body, unknown>>,
  "reviewed" | "back"
> & {
  readonly preview: { readonly error: unknown; readonly isPending: boolean; stop(): void };
  readonly save: {
    readonly error: unknown;
    readonly isPending: boolean;
    mutate(body: Body): void;
  };
};

/** The form, which keeps what is typed, and in its place what the change would do. */
export function ReviewedChange<Body extends object>({
  change,
  what,
  children,
}: {
  change: Change<Body>;
  /** What is about to be saved, in words. */
  what: (body: Body) => ReactNode;
  children: ReactNode;
}) {
  const { reviewed, save, back } = change;
  return (
    <>
      <div hidden={reviewed !== null}>{children}</div>
      {reviewed && (
        <ChangeReview
          preview={reviewed.preview}
          what={what(reviewed.body)}
          workerPath={paths.result}
          isSaving={save.isPending}
          error={save.error}
          onSave={() => save.mutate(reviewed.body)}
          onBack={back}
        />
      )}
    </>
  );
}

/** Ends the form of such a change. */
export function LookActions({
  preview,
  onLeave,
}: Pick<Change<object>, "preview"> & { onLeave: () => void }) {
  const { i18n } = useLingui();
  return (
    <>
      <FormProblem error={preview.error} />
      <FormActions>
        <SubmitButton isBusy={preview.isPending}>{i18n.t("See who changes verdict")}</SubmitButton>
        {preview.isPending ? (
          <Button onClick={preview.stop}>{i18n.t("Stop looking")}</Button>
        ) : (
          <Button onClick={onLeave}>{i18n.t("Leave as it was")}</Button>
        )}
        <Status>
          {preview.isPending &&
            i18n.t(
              "Every day that rests on this is judged as it would be; with thousands of days that takes some seconds. Nothing is stored.",
            )}
        </Status>
      </FormActions>
    </>
  );
}
