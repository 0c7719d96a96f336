import type { I18n } from "@lingui/core";

export type ProblemParams = Readonly<Record<string, string | number>>;

/** A problem's code as a sentence: what happened, and what to do. */
export function codeText(i18n: I18n, code: string, params: ProblemParams): string | null {
  switch (code) {
    case "no-connection":
      return i18n.t("The server can’t be reached. What you typed is kept.");
    case "signed-out":
      return i18n.t("You have been signed out. Sign in again; what you typed is kept.");
    case "token-unknown":
      return i18n.t("Nobody has this token. Make a new one under your account.");
    case "token-over":
      return i18n.t("This token has expired or was ended. Make a new one under your account.");
    case "token-person-gone":
      return i18n.t(
        "The person of this token has left or has no role any more. The token opens nothing.",
      );
    case "hook-unsigned":
      return i18n.t("None of the mail server’s secrets signed this report. Nothing was changed.");
    case "hook-stale":
      return i18n.t("This report is not of now. Nothing was changed; check both clocks.");
    case "token-scope":
      return i18n.t("This token was not made for that. Nothing was changed.");
    case "access-ended":
      return i18n.t(
        "Your access was for a time, and that is over. An administrator can give it anew.",
      );
    case "access-taken":
      return i18n.t(
        "Your access was taken away. An administrator can give it anew; what you typed is kept.",
      );
    case "no-grant":
      return i18n.t("Nobody has given you a role here yet. Ask your administrator.");
    case "csrf":
      return i18n.t("This page is out of date. Load it again and repeat the last step.");
    case "forbidden":
      return i18n.t("This is not yours to do. Nothing was changed.");
    case "other-year":
      return i18n.t("Your access is for {years}.", { years: params.years ?? "" });
    case "own-grant":
      return i18n.t("You can’t change your own roles. Ask another administrator.");
    case "own-proposal":
      return i18n.t("You proposed this yourself. Somebody else has to approve it.");
    case "not-found":
      return i18n.t("It does not exist, or it is not yours to see.");
    case "stale":
    case "revision-missing":
      return i18n.t("Someone saved this before you. Nothing of yours is lost; choose what stands.");
    case "key-reused":
    case "key-missing":
    case "in-progress":
      return i18n.t("This is being saved already. Wait a moment, then look again.");
    case "try-again":
      return i18n.t("Two people saved at once. Try again.");
    case "invalid":
      return i18n.t("Something in the form needs another look.");
    case "exists-already":
      return i18n.t("There is one like this already.");
    case "reference-missing":
      return i18n.t("Something that this refers to is gone.");
    case "shifts-overlap":
      return i18n.t("This worker has another shift at that time.");
    case "assignments-overlap":
      return i18n.t("This worker has a protector for that use on those days.");
    case "membership-overlaps":
      return i18n.t("The dates overlap with a membership that is there.");
    case "loan-overlaps":
      return i18n.t("This person is lent to a crew on some of these days already.");
    case "loan-has-begun":
      return i18n.t("This loan has begun; give it a last day.");
    case "absence-overlaps":
      return i18n.t("This person is marked as not in on some of these days already.");
    case "last-administrator":
      return i18n.t("Somebody has to remain administrator.");
    case "role-granted-already":
      return i18n.t("This person has that role already.");
    case "subject-taken":
      return i18n.t("Another person has this sign-in.");
    case "finding-open-already":
      return i18n.t("A finding for this cause is open already.");
    case "finding-closed":
      return i18n.t("This finding was closed meanwhile. Nothing was changed.");
    case "too-late-to-undo":
      return i18n.t("It is too late to undo this. Write a comment to the officer.");
    case "plan-put-aside-already":
      return i18n.t("This plan has been put aside already.");
    case "notice-sent-already":
      return i18n.t("The notice has gone out already.");
    case "code-used":
      return i18n.t("This code has been used. Ask for a new one.");
    case "code-expired":
      return i18n.t("This code has run out. Ask for a new one.");
    case "code-unknown":
      return i18n.t("This code is not known. Look at it again.");
    case "not-computed":
      return i18n.t("This result is still being worked out.");
    case "imported-no-working":
      return i18n.t("Imported: the working is not available.");
    case "nothing-to-do":
      return i18n.t("There is nothing to do here.");
    case "import-refused":
      return i18n.t("Nothing was imported. The report names each line.");
    case "quota-exceeded":
      return i18n.t(
        "There is no room left for files. Delete recordings that are no longer needed.",
      );
    case "instruments-overlap":
      return i18n.t("The instrument was somewhere else at that time. Look at its other runs.");
    case "already-out":
      return i18n.t("Somebody has sent it out already. Load the page anew to see with whom.");
    case "same-file":
      return i18n.t("This very file is here already.");
    case "wrong-state":
      return i18n.t("It has moved on meanwhile. Load the page anew to see how far it is.");
    case "too-many-tries":
      return i18n.t(
        "Too many tries. Wait {minutes, plural, one {# minute} other {# minutes}}, then try again.",
        {
          minutes: params.minutes ?? 10,
        },
      );
    case "too-large":
      return i18n.t("This is too large to take.");
    case "not-csv":
      return notCsvText(i18n, params.found);
    case "database-down":
      return i18n.t("The database can’t be reached. Nothing was saved; what you typed is kept.");
    case "mail-down":
      return i18n.t("The mail server can’t be reached. The notice waits and is not lost.");
    case "provider-down":
      return i18n.t("The sign-in service can’t be reached. Try again in a moment.");
    case "link-used":
      return i18n.t("This link has been used: the letter is acknowledged.");
    case "link-expired":
      return i18n.t("This link has run out. Ask the safety officer for the letter on paper.");
    case "link-not-yours":
      return i18n.t(
        "This letter is to somebody else than the person signed in here. Sign out, or open the link on your own device.",
      );
    case "roster-unconfirmed":
      return i18n.t(
        "{leavers, plural, one {# worker} other {# workers}} of {present} would leave. Nothing was stored; confirm it first.",
        { leavers: params.leavers ?? 0, present: params.present ?? 0 },
      );
    case "letter-acknowledged":
      return i18n.t("This letter is acknowledged already.");
    case "draining":
      return i18n.t("The server is not ready. Try again in a moment.");
    case "internal":
      return i18n.t("The server made a mistake. Nothing was saved; what you typed is kept.");
    default:
      return null;
  }
}

function notCsvText(i18n: I18n, found: string | number | undefined): string {
  switch (found) {
    case "empty":
      return i18n.t("The file is empty.");
    case "spreadsheet":
      return i18n.t("This is a spreadsheet or an archive. Save the sheet as CSV first.");
    case "pdf":
      return i18n.t("This is a PDF. A CSV is needed.");
    case "picture":
      return i18n.t("This is a picture. A CSV is needed.");
    case "other-encoding":
      return i18n.t("Its letters are neither in UTF-8 nor in UTF-16. Save it as CSV in UTF-8.");
    default:
      return i18n.t("This is no text, so no CSV either. Save the sheet as CSV in UTF-8.");
  }
}
