import type { I18n } from "@lingui/core";

/** What an event can be about. */
export const SUBJECT_KINDS = [
  "user",
  "site",
  "worker",
  "crew",
  "shift",
  "run",
  "finding",
  "notice",
  "letter",
  "protector",
  "instrument",
  "area",
  "task",
  "job",
  "file",
  "recording",
  "survey",
  "workplace-change",
  "history-import",
  "time-history",
  "fit-test",
  "microphone-check",
  "protector-issue",
  "wearing-round",
  "warning-signal",
  "training",
  "plan",
  "timetable",
  "group-mapping",
  "draw",
  "hand-over",
  "organization",
  "legal-hold",
  "erasure",
  "record-transfer",
] as const;
export type SubjectKind = (typeof SUBJECT_KINDS)[number];

export const isSubjectKind = (value: string | null): value is SubjectKind =>
  SUBJECT_KINDS.some((kind) => kind === value);

export function subjectWord(i18n: I18n, kind: string): string {
  switch (kind) {
    case "user":
      return i18n.t("Person");
    case "site":
      return i18n.t("Site");
    case "group-mapping":
      return i18n.t("Role by group");
    case "hand-over":
      return i18n.t("Hand-over");
    case "organization":
      return i18n.t("Organization");
    case "legal-hold":
      return i18n.t("Hold on records");
    case "erasure":
      return i18n.t("Erasure");
    case "record-transfer":
      return i18n.t("Records handed over");
    case "draw":
      return i18n.t("Drawn records");
    case "worker":
      return i18n.t("Worker");
    case "crew":
      return i18n.t("Crew");
    case "shift":
      return i18n.t("Shift");
    case "run":
      return i18n.t("Run");
    case "finding":
      return i18n.t("Finding");
    case "notice":
      return i18n.t("Notice");
    case "letter":
      return i18n.t("Letter of results");
    case "protector":
      return i18n.t("Protector");
    case "instrument":
      return i18n.t("Instrument");
    case "area":
      return i18n.t("Area");
    case "task":
      return i18n.t("Task");
    case "job":
      return i18n.t("Job");
    case "file":
      return i18n.t("File");
    case "recording":
      return i18n.t("Recording");
    case "survey":
      return i18n.t("Survey");
    case "workplace-change":
      return i18n.t("Change at work");
    case "history-import":
      return i18n.t("File of levels");
    case "time-history":
      return i18n.t("Time history");
    case "fit-test":
      return i18n.t("Fit test");
    case "microphone-check":
      return i18n.t("Two-microphone check");
    case "protector-issue":
      return i18n.t("Issue of a protector");
    case "wearing-round":
      return i18n.t("Wearing round");
    case "warning-signal":
      return i18n.t("Warning signal");
    case "training":
      return i18n.t("Training");
    case "plan":
      return i18n.t("Plan");
    case "timetable":
      return i18n.t("Timetable");
    default:
      return kind;
  }
}

/** What was done; what it was done to stands beside it. An action that is not known here speaks with its code. */
export function actionWord(i18n: I18n, action: string): string {
  switch (action) {
    case "add-crew-member":
      return i18n.t("Member put in");
    case "mark-absent":
      return i18n.t("Marked as not in");
    case "end-absence":
      return i18n.t("Last day not in");
    case "strike-absence":
      return i18n.t("In after all");
    case "lend-worker":
      return i18n.t("Lent to another crew");
    case "end-loan":
      return i18n.t("Last day of a loan");
    case "take-back-loan":
      return i18n.t("Loan taken back");
    case "add-crew-supervisor":
      return i18n.t("Supervisor put in");
    case "end-crew-membership":
      return i18n.t("Membership ended");
    case "take-back-crew-membership":
      return i18n.t("Membership taken back");
    case "end-crew-supervision":
      return i18n.t("Supervision ended");
    case "add-protector-revision":
      return i18n.t("Data changed");
    case "attach-protector-file":
      return i18n.t("Data sheet attached");
    case "remove-protector-file":
      return i18n.t("Data sheet taken off");
    case "add-protector-combination":
      return i18n.t("Data of two worn together entered");
    case "keep-plan":
      return i18n.t("Plan kept");
    case "put-plan-aside":
      return i18n.t("Plan put aside");
    case "add-plan-step":
      return i18n.t("Step of a plan entered");
    case "change-plan-step":
      return i18n.t("Step of a plan changed");
    case "mark-plan-step":
      return i18n.t("Step of a plan marked");
    case "start-timetable":
      return i18n.t("Timetable asked for");
    case "cancel-timetable":
      return i18n.t("Search for a timetable given up");
    case "answer-timetable":
      return i18n.t("Search for a timetable ended");
    case "add-site-settings":
      return i18n.t("Rules changed");
    case "add-task-level":
      return i18n.t("Level changed");
    case "assign-protector":
      return i18n.t("Protector assigned");
    case "end-assignment":
      return i18n.t("Assignment ended");
    case "sign-in":
      return i18n.t("Signed in");
    case "bind-sign-in":
      return i18n.t("Signed in for the first time");
    case "bind-worker-sign-in":
      return i18n.t("Sign-in bound with a code");
    case "issue-sign-in-code":
      return i18n.t("Sign-in code issued");
    case "make-token":
      return i18n.t("Token for another system made");
    case "end-token":
      return i18n.t("Token for another system ended");
    case "map-group":
      return i18n.t("Group given a role");
    case "end-group-mapping":
      return i18n.t("Group’s role ended");
    case "follow-groups":
      return i18n.t("Roles follow the sign-in service’s groups");
    case "admit-by-group":
      return i18n.t("Let in by a group");
    case "let-visitor-in":
      return i18n.t("Visitor let in");
    case "end-visit":
      return i18n.t("Visit ended");
    case "revoke-user":
      return i18n.t("Access ended");
    case "set-own-language":
      return i18n.t("Own language chosen");
    case "export-year-records":
      return i18n.t("Year’s records taken as a ZIP");
    case "finish-year-records":
      return i18n.t("Year’s ZIP written to its end");
    case "export-year":
      return i18n.t("Year file taken");
    case "start-outing":
      return i18n.t("Sent out");
    case "end-outing":
      return i18n.t("Came back");
    case "discard-outing":
      return i18n.t("Came back, run discarded");
    case "undo-outing":
      return i18n.t("Never went out");
    case "record-calibration":
      return i18n.t("Calibration recorded");
    case "start-recording":
      return i18n.t("Sent in");
    case "analyse-recording":
      return i18n.t("Analysed");
    case "refuse-recording":
      return i18n.t("Could not be used");
    case "accept-recording-faults":
      return i18n.t("Used in spite of a fault");
    case "cancel-recording":
      return i18n.t("Cancelled");
    case "keep-recording":
      return i18n.t("Sound kept");
    case "delete-audio":
      return i18n.t("Sound deleted");
    case "adopt-recording":
      return i18n.t("Level from a recording");
    case "measure-tone":
      return i18n.t("Calibrator’s tone measured");
    case "upload-file":
      return i18n.t("File sent");
    case "start-history-import":
      return i18n.t("File of levels sent in");
    case "read-history-import":
      return i18n.t("Read by a mapping");
    case "order-history-storing":
      return i18n.t("Ordered to be stored");
    case "finish-history-import":
    case "store-history":
      return i18n.t("Stored");
    case "cancel-history-import":
    case "cancel-microphone-check":
      return i18n.t("Cancelled");
    case "change-history-stretches":
      return i18n.t("Stretches changed");
    case "export-history":
      return i18n.t("Levels exported");
    case "record-sample":
    case "record-shift":
    case "record-run":
    case "record-fit-test":
    case "record-wearing-round":
      return i18n.t("Recorded");
    case "correct-shift":
    case "correct-run":
    case "correct-fit-test":
      return i18n.t("Corrected");
    case "void-shift":
    case "void-run":
    case "void-fit-test":
    case "strike-wearing-round":
      return i18n.t("Struck out");
    case "replace-own-report":
      return i18n.t("Replaced by a later report");
    case "start-microphone-check":
      return i18n.t("Recordings sent in");
    case "type-microphone-check":
      return i18n.t("Levels typed in");
    case "analyse-microphone-check":
      return i18n.t("Analysed");
    case "refuse-microphone-check":
      return i18n.t("Could not be used");
    case "swap-microphone-check":
      return i18n.t("Outside and inside swapped");
    case "keep-microphone-check":
      return i18n.t("Kept as a fit test");
    case "issue-protector":
      return i18n.t("Handed out");
    case "acknowledge-issue":
      return i18n.t("Receipt confirmed");
    case "end-issue":
      return i18n.t("Issue ended");
    case "enter-stock":
      return i18n.t("Stock entered");
    case "record-refusal":
      return i18n.t("Protector refused");
    case "set-fit-policy":
      return i18n.t("Rules for fit tests changed");
    case "record-workplace-change":
      return i18n.t("Entered");
    case "look-at-protectors":
      return i18n.t("Protectors looked at, still right");
    case "strike-workplace-change":
      return i18n.t("Struck out");
    case "set-survey-state":
      return i18n.t("State changed");
    case "adopt-survey":
      return i18n.t("Results adopted");
    case "set-remeasure-interval":
      return i18n.t("Changed");
    case "record-absence":
      return i18n.t("Marked absent");
    case "withdraw-absence":
      return i18n.t("No longer absent");
    case "open-finding":
      return i18n.t("Opened");
    case "rejudge-finding":
      return i18n.t("Judged anew");
    case "withdraw-finding":
      return i18n.t("Withdrawn after a correction");
    case "report-problem":
      return i18n.t("Problem reported");
    case "take-in-hand-finding":
      return i18n.t("Taken in hand");
    case "mark-done-finding":
      return i18n.t("Marked done");
    case "cannot-finding":
      return i18n.t("Can’t, because…");
    case "undo-finding":
      return i18n.t("Undone");
    case "reopen-finding":
      return i18n.t("Reopened");
    case "close-finding":
      return i18n.t("Closed");
    case "export-year-workbook":
      return i18n.t("Year taken as a workbook");
    case "issue-year-report":
      return i18n.t("Report of the year issued");
    case "choose-mails":
      return i18n.t("Mails chosen that are done without");
    case "take-own-record":
      return i18n.t("Own record taken as a file");
    case "choose-digest":
      return i18n.t("Hour of the daily mail chosen");
    case "give-hand-over":
      return i18n.t("Handed over to the next in charge");
    case "receive-hand-over":
      return i18n.t("Hand-over read");
    case "agree-employer-duties":
      return i18n.t("Duties agreed with an employer");
    case "share-with-employer":
      return i18n.t("Results shared with an employer");
    case "end-employer-share":
      return i18n.t("Sharing with an employer ended");
    case "export-shared-results":
      return i18n.t("Results taken as a file by an employer");
    case "set-retention-term":
      return i18n.t("Own term for keeping records set");
    case "place-hold":
      return i18n.t("Records held");
    case "lift-hold":
      return i18n.t("Hold lifted");
    case "propose-erasure":
      return i18n.t("Erasure proposed");
    case "approve-erasure":
      return i18n.t("Erasure approved");
    case "withdraw-erasure":
      return i18n.t("Erasure withdrawn");
    case "erase-person":
      return i18n.t("Person erased from the records");
    case "finish-erasure":
      return i18n.t("Erasure done");
    case "propose-transfer":
      return i18n.t("Handing over to a successor proposed");
    case "approve-transfer":
      return i18n.t("Handing over to a successor approved");
    case "withdraw-transfer":
      return i18n.t("Handing over to a successor withdrawn");
    case "begin-transfer-file":
      return i18n.t("File for the successor begun");
    case "hand-out-transfer-file":
      return i18n.t("File for the successor handed out whole");
    case "receive-transfer":
      return i18n.t("Successor’s receipt recorded");
    case "name-trail-keeper":
      return i18n.t("Keeper of the trail’s head named");
    case "send-trail-head":
      return i18n.t("Trail’s head sent to its keeper");
    case "draw-records":
      return i18n.t("Records drawn at random");
    case "mark-drawn-record":
      return i18n.t("Drawn record marked");
    case "sign-draw":
      return i18n.t("Drawn records signed off");
    case "record-training":
      return i18n.t("Training entered");
    case "change-training":
      return i18n.t("Training put right");
    case "strike-training":
      return i18n.t("Training struck out");
    case "make-calendar-feed":
      return i18n.t("Calendar address made");
    case "end-calendar-feed":
      return i18n.t("Calendar address ended");
    case "hand-over-finding":
      return i18n.t("Handed over");
    case "escalate-finding":
      return i18n.t("Overdue: went up to a named person");
    case "send-escalation":
      return i18n.t("Mail about overdue findings sent");
    case "set-escalation":
      return i18n.t("Whom overdue findings go up to changed");
    case "record-measure":
      return i18n.t("Measure entered");
    case "change-measure":
      return i18n.t("Measure changed");
    case "strike-measure":
      return i18n.t("Measure struck out");
    case "attach-finding-file":
      return i18n.t("Paper attached");
    case "remove-finding-file":
      return i18n.t("Paper taken off");
    case "comment-finding":
      return i18n.t("Comment");
    case "import-roster":
      return i18n.t("Roster imported");
    case "write-result-letter":
      return i18n.t("Letter written");
    case "acknowledge-letter":
      return i18n.t("Letter acknowledged");
    case "send-notice":
      return i18n.t("Sent");
    case "bounce-notice":
    case "bounce-trail-head":
    case "bounce-escalation":
      return i18n.t("Came back undeliverable");
    case "send-again-notice":
      return i18n.t("Sent again");
    case "give-on-paper-notice":
      return i18n.t("Told on paper or in person");
    case "hold-notice":
      return i18n.t("Held");
    case "send-now-notice":
      return i18n.t("Sent at once");
    default:
      if (action.startsWith("create-")) return i18n.t("Added");
      if (action.startsWith("change-")) return i18n.t("Changed");
      if (action.startsWith("import-")) return i18n.t("Imported");
      return action;
  }
}
