import type { I18n } from "@lingui/core";
import { formatDate } from "../format/date";
import { formatLevel, formatLevelChange } from "../format/level";
import { decimalMark } from "../format/number";
import { localeOf } from "../i18n/index";

export interface FieldIssue {
  readonly code: string;
  readonly params: Readonly<Record<string, unknown>>;
}

const isText = (params: FieldIssue["params"]) => params.origin === "string";

function sizeText(i18n: I18n, { code, params }: FieldIssue): string {
  const minimum = Number(params.minimum);
  const maximum = Number(params.maximum);
  if (code === "too_small") {
    if (params.origin === "array")
      return minimum <= 1
        ? i18n.t("At least one is needed.")
        : i18n.t("All {minimum} values are needed.", { minimum });
    if (isText(params))
      return minimum <= 1
        ? i18n.t("This is needed.")
        : i18n.t("At least {minimum, plural, one {# character} other {# characters}}.", {
            minimum,
          });
    return String(params.inclusive) === "false"
      ? i18n.t("More than {minimum}.", { minimum })
      : i18n.t("At least {minimum}.", { minimum });
  }
  if (params.origin === "array") return i18n.t("These are too many.");
  if (isText(params))
    return i18n.t("At most {maximum, plural, one {# character} other {# characters}}.", {
      maximum,
    });
  return i18n.t("At most {maximum}.", { maximum });
}

function formatText(i18n: I18n, format: unknown): string {
  switch (format) {
    case "date":
      return i18n.t("This is not a date.");
    case "email":
      return i18n.t("This is not a mail address.");
    // Nobody types one: it is chosen from a list.
    case "uuid":
      return i18n.t("Choose one of these.");
    default:
      return i18n.t("This is not written as it should be.");
  }
}

function impossibleTrialText(i18n: I18n, { ear, trial, foundDb, limitDb }: FieldIssue["params"]) {
  const locale = localeOf(i18n);
  const values = {
    trial: Number(trial),
    found: formatLevel(Number(foundDb), locale),
    limit: formatLevel(Number(limitDb), locale),
  };
  return ear === "left"
    ? i18n.t(
        "Left ear, trial {trial}: {found} dB is more than an ear can have. Above {limit} dB sound comes through the skull (bone conduction). Look at that trial again.",
        values,
      )
    : i18n.t(
        "Right ear, trial {trial}: {found} dB is more than an ear can have. Above {limit} dB sound comes through the skull (bone conduction). Look at that trial again.",
        values,
      );
}

function figuresOf(i18n: I18n, { foundDb, offDb }: FieldIssue["params"]) {
  const locale = localeOf(i18n);
  return {
    found: formatLevel(Number(foundDb), locale),
    difference: formatLevelChange(Number(offDb), locale),
  };
}

/**
 * What is wrong with a field, as a sentence: the codes of the schemas (the same here and on the server), of the fields'
 * own parsers, and of what only the server can know.
 */
export function issueText(i18n: I18n, issue: FieldIssue): string {
  const { code, params } = issue;
  switch (code) {
    case "required":
      return i18n.t("This is needed.");
    case "invalid_type":
      if (params.expected === "object") return i18n.t("An object with named members is needed.");
      return params.expected === "number" || params.expected === "int"
        ? i18n.t("A number is needed.")
        : i18n.t("This is needed.");
    case "too_small":
    case "too_big":
      return sizeText(i18n, issue);
    case "invalid_format":
      return formatText(i18n, params.format);
    case "invalid_value":
    case "invalid_union":
      return i18n.t("Choose one of these.");
    case "not_multiple_of":
      return i18n.t("Only whole steps count here.");
    case "ambiguous":
      return i18n.t("This can be read in two ways. Write decimals with a “{mark}”", {
        mark: decimalMark(localeOf(i18n)),
      });
    case "not-a-number":
      return i18n.t("This is not a number.");
    case "not-a-duration":
      return i18n.t("This is not a duration. Write 450, 7:30 or 7.5h.");
    case "not-a-date":
      return i18n.t("This is not a date.");
    case "not-a-time":
      return i18n.t("This is not a time of day.");
    case "tokens-enough":
      return i18n.t("You have {count} tokens that work. End one first.", {
        count: Number(issue.params.count),
      });
    case "reads-it-already":
      return i18n.t("This person reads the site already, and for longer.");
    case "day-is-over":
      return i18n.t("This day is over at the site.");
    case "year-not-begun":
      return i18n.t("This year has not begun.");
    case "email-taken":
      return i18n.t("Another person has this mail address.");
    case "employee-number-taken":
      return i18n.t("Another worker has this number.");
    case "employee-number-signs":
      return i18n.t("Only letters, digits, spaces and - / . _ can stand in an employee number.");
    case "name-taken":
      return i18n.t("This name is taken.");
    case "serial-number-taken":
      return i18n.t("Another instrument has this serial number.");
    case "subject-taken":
      return i18n.t("Another person has this sign-in.");
    case "worker-has-user":
      return i18n.t("This worker has a sign-in already.");
    case "tasks-longer-than-shift":
      return i18n.t(
        "The tasks are longer than the shift. Take some minutes off, or lengthen the shift.",
      );
    case "task-twice":
      return i18n.t("This task stands here twice.");
    case "ends-before-start":
      return i18n.t("It ends before it starts.");
    case "left-before-hired":
      return i18n.t("The day of leaving lies before the day of hiring.");
    case "email-or-subject":
      return i18n.t("A mail address or a sign-in is needed.");
    case "one-use-only":
      return i18n.t("Choose a task or an area, not both.");
    case "task-or-job":
      return i18n.t("Choose a task or a job, one of them.");
    case "same-protector-twice":
      return i18n.t("Two different protectors are needed to wear them together.");
    case "code-used":
    case "code-expired":
    case "code-unknown":
      return i18n.t("This code does not work (any more). Ask for a new one.");
    case "date-in-future":
      return i18n.t("This date lies ahead.");
    case "before-its-fit":
      return i18n.t("The fit was tested on {date}: on it the device goes out that day or later.", {
        date: formatDate(String(params.testedOn), localeOf(i18n)),
      });
    case "before-hire":
      return i18n.t("This worker was hired later than that.");
    case "shift-after-leaving":
      return i18n.t(
        "A shift on {date} is recorded. Leaving comes on that day or later, or the shift is struck out first.",
        { date: formatDate(String(params.lastOn), localeOf(i18n)) },
      );
    case "missing-worked-after":
      return i18n.t(
        "{name} {others, plural, =0 {is} one {and one more are} other {and # more are}} missing from the file, but worked after that day, last on {date}. Choose a later day, or put them into the file.",
        {
          name: params.name ?? "",
          others: Number(params.others ?? 0),
          date: formatDate(String(params.lastOn), localeOf(i18n)),
        },
      );
    case "after-leaving":
      return i18n.t("This worker had left before that.");
    case "snr-below-l":
      return i18n.t(
        "The SNR lies below the L of the same label: look on the label which of them is wrong.",
      );
    case "hml-all-three":
      return i18n.t("H, M and L belong together: all three, or none.");
    case "delay-too-long":
      return i18n.t("A canceller’s delay is at most a tenth of a second, 100 000 µs.");
    case "battery-too-long":
      return i18n.t("A battery lasts at most 166 h.");
    case "deviation-negative":
      return i18n.t("A standard deviation can’t be negative: type it without the minus.");
    case "too-many-bands":
      return i18n.t("This line has more values than there are bands. Take the others out.");
    case "other-63-hz":
      return i18n.t(
        "It has other bands than the rest: eight values are read from 63 Hz on, seven from 125 Hz. Give every line the same.",
      );
    case "band-missing":
      return i18n.t(
        "Mean and deviation of a band belong together: type both, or leave both empty.",
      );
    case "subjects-too-few":
      return i18n.t("At least two test subjects are needed: one alone has no deviation.");
    case "subjects-without-bands":
      return i18n.t(
        "Mean and deviation by band are still empty, and without them the subjects count for nothing: take both from the subjects, or type them.",
      );
    case "attenuation-negative":
      return i18n.t(
        "Attenuation is what is taken off: type it without the minus. A protector that lets more through than there is goes on no register.",
      );
    case "bands-backwards":
      return i18n.t(
        "No protector takes so much more off low frequencies than off high ones. The bands may stand in the wrong order: 63 or 125 Hz comes first.",
      );
    case "active-at-8-khz":
      return i18n.t(
        "No active part takes anything off at 8 kHz. Enter 0 there, or the bandwidth at which it ends.",
      );
    case "few-below-most":
      return i18n.t(
        "What few users reach can’t be less than what most users reach. The two may be swapped.",
      );
    case "delay-and-gain-together":
      return i18n.t("Delay and gain belong together: both, or none.");
    case "reason-needed":
      return i18n.t("A reason is needed: what is there already changes.");
    case "level-off-bands":
      return i18n.t(
        "The bands add up to {found} dB(A), {difference} dB from the level. Mend one of them, or say that the level is right.",
        figuresOf(i18n, params),
      );
    case "level-off-samples":
      return i18n.t(
        "The samples have an energy mean of {found} dB(A), {difference} dB from the level. Mend one of them, or say that the level is right.",
        figuresOf(i18n, params),
      );
    case "kind-fixed":
      return i18n.t("Somebody has worn it: the kind stays. Add another protector instead.");
    case "date-too-early":
      return i18n.t("This date lies too far back.");
    case "date-too-far-ahead":
      return i18n.t("This date lies more than a year ahead.");
    case "rule-set-not-in-force":
      return i18n.t("This rule set was not in force on that day.");
    case "rule-set-unknown":
      return i18n.t("There is no such rule set.");
    case "rule-set-twice":
      return i18n.t("A rule set stands here twice.");
    case "task-of-other-site":
      return i18n.t("This task belongs to another site.");
    case "area-of-other-site":
      return i18n.t("This area belongs to another site.");
    case "tasks-longer-than-day":
      return i18n.t("The tasks are longer than 24 hours.");
    case "not-a-supervisor":
      return i18n.t("This person is no supervisor at the crew’s site.");
    case "grant-twice":
      return i18n.t("This role stands here twice.");
    case "worker-needed":
      return i18n.t("The worker’s role needs a worker: choose one.");
    case "time-zone-unknown":
      return i18n.t("This time zone is not known.");
    case "field-check-drift":
      return i18n.t(
        "The field checks drifted by more than 0.5 dB. Discard the run, or say why it is kept.",
      );
    case "calibration-out-of-date":
      return i18n.t("The laboratory calibration had run out on that day. Say why the run is kept.");
    case "field-check-mistyped":
      return i18n.t(
        "A field check looks mistyped: no instrument drifts that far. Look at it again, or say why the run is kept.",
      );
    case "calibration-failed":
      return i18n.t(
        "The instrument had failed its laboratory calibration on that day. Say why the run is kept.",
      );
    case "run-too-short":
      return i18n.t("The run is shorter than was wanted of it. Say why it is kept.");
    case "field-check-missing":
      return i18n.t("A field check is missing. Enter it, or say why the run is kept.");
    case "outside-shift":
      return i18n.t(
        "The run lies outside the worker’s shift. Choose that it is only evidence, or say why it is kept.",
      );
    case "shorter-than-shift":
      return i18n.t(
        "The run is clearly shorter than the shift. Choose that it covers a part, or say why it is kept.",
      );
    case "clipped":
    case "under-range":
      return i18n.t("The instrument was overloaded, or under its range. Say why the run is kept.");
    case "instrument-not-for-runs":
      return i18n.t("This instrument takes no runs: it is out of use, or a calibrator.");
    case "worker-or-place":
      return i18n.t("A worker, or a place.");
    case "not-on-that-day":
      return i18n.t("This lies more than a day away from the run’s date.");
    case "longer-than-a-day":
      return i18n.t("A run lasts 24 hours at most. Until when was it really worn?");
    case "worker-of-other-site":
      return i18n.t("This worker belongs to another site.");
    case "survey-of-other-site":
      return i18n.t("This survey is another site’s.");
    case "failed-has-no-due-date":
      return i18n.t("What has failed is not good until any date.");
    case "file-kind":
      return i18n.t("Photographs (PNG, JPEG, WebP) and PDF are taken, nothing else.");
    case "file-not-as-named":
      return params.found === "text/plain"
        ? i18n.t(
            "The content is not what the name says: {name} holds text, a web page perhaps. Photographs (PNG, JPEG, WebP) and PDF are taken.",
            { name: String(params.name) },
          )
        : i18n.t(
            "The content is not what the name says: {name} is neither a photograph (PNG, JPEG, WebP) nor a PDF.",
            { name: String(params.name) },
          );
    case "file-attached-already":
      return i18n.t("This file stands here already.");
    case "measure-without-date":
      return i18n.t("Say by when it is to be done, or when it was done.");
    case "employee-numbers-unknown":
      return i18n.t("Nobody at this site has {numbers}.", { numbers: String(params.numbers) });
    case "mail-required":
      return i18n.t("This mail always comes.");
    case "not-json":
      return i18n.t("This is not JSON.");
    case "site-stays":
      return i18n.t("It stays with its site: strike it out and enter it at the other.");
    case "not-in-then":
      return params.toDate === undefined
        ? i18n.t("This person is said not to be in from {from} on. Change that first.", {
            from: formatDate(String(params.fromDate), localeOf(i18n)),
          })
        : i18n.t("This person is said not to be in from {from} to {to}. Change that first.", {
            from: formatDate(String(params.fromDate), localeOf(i18n)),
            to: formatDate(String(params.toDate), localeOf(i18n)),
          });
    case "not-in-crew":
      return i18n.t("This person does not belong to the crew on those days.");
    case "shift-entered":
      return i18n.t("A shift of this person is entered on one of those days.");
    case "beyond-loan":
      return i18n.t(
        "This person is lent to the crew only until before that; give a day within the loan.",
      );
    case "not-of-this-crew":
      return i18n.t("This person is neither in charge of the crew nor an officer of the site.");
    case "other-crew":
      return i18n.t("Choose another crew of the site that is in use.");
    case "not-of-this-site":
      return i18n.t("This person has no part in the site’s findings.");
    case "not-a-clock-here":
      return i18n.t("No site has this clock. Choose one of those on the list.");
    case "not-a-worker-here":
      return i18n.t("This worker is not of this site.");
    case "not-erasable":
      return i18n.t(
        "This person is not due any more, is held, or stands in another proposal. Look at the list again.",
      );
    case "flat-or-bands":
      return i18n.t("Say how much less in one figure, or by bands, not both.");
    case "task-without-bands":
      return i18n.t("No octave bands of this task are known: give one figure for all of it.");
    case "worker-not-in-scope":
      return i18n.t("This worker is not among those the changes are tried for.");
    case "protector-unknown":
      return i18n.t("This protector is not on the register in use.");
    case "task-nobody-may":
      return i18n.t("Nobody may do this task: say who is qualified, or take the task out.");
    case "task-not-measured":
      return i18n.t(
        "The noise of this task is not on record. Measure it, or give it a level first.",
      );
    case "task-unbounded":
      return i18n.t(
        "What this task does to these people’s dose is not known: its level is of another kind, or what their protectors take off.",
      );
    case "staffing-outside":
      return i18n.t("From comes before until, and both lie within the shift.");
    case "staffing-overlaps":
      return i18n.t("This time overlaps the one before it.");
    case "staffing-more-than-people":
      return i18n.t(
        "There {count, plural, one {is # person} other {are # people}}: nobody else can be put there.",
        { count: Number(params.count) },
      );
    case "rest-or-quiet":
      return i18n.t("Say what time at none of the tasks is: one task, or quiet of a level.");
    case "criterion-unknown":
      return i18n.t("The rules of this site have no such criterion.");
    case "reading-empty":
      return i18n.t("This row says nothing yet. Type a figure, or take the row out.");
    case "not-sha256":
      return i18n.t("A SHA-256 is 64 digits and letters from a to f.");
    case "sha256-not-handed-out":
      return i18n.t(
        "No file that was handed out has this SHA-256. Let the successor count it again over the file they hold, or hand it out anew.",
      );
    case "signed-before-handed-out":
      return i18n.t("The file went out later than that.");
    case "signed-before-written":
      return i18n.t("The letter was written later than that.");
    case "in-the-future":
      return i18n.t("This date lies ahead.");
    case "look-twice":
      return i18n.t("This worker is in this round with this task already.");
    case "answer-needed":
      return i18n.t("Choose an answer for one task at least.");
    case "said-long-ago":
      return i18n.t(
        "You said this more than {days} days ago. Ask your safety officer to change it.",
        { days: params.days },
      );
    case "more-worn-than-seen":
      return i18n.t("More times worn than seen.");
    case "before-issue":
      return i18n.t("The device was handed out later than that.");
    case "shift-of-another-day":
      return i18n.t("That shift is another worker’s or another day’s.");
    case "open-end-unconfirmed":
      return i18n.t(
        "This shift ends at {time}, which lies ahead. Save it once it is over, or confirm that it will end so.",
        { time: params.time },
      );
    case "whole-day-unconfirmed":
      return i18n.t("A shift of exactly 24 hours: confirm it below.");
    case "protector-archived":
      return i18n.t("This protector is no longer in use.");
    case "protector-data-later":
      return i18n.t("Its data begin later than that.");
    case "assignments-overlap":
      return i18n.t("This worker has a protector for that use on those days.");
    case "reason-without-requirement":
      return i18n.t("There is no requirement that this would be the reason for.");
    case "job-of-other-site":
      return i18n.t("This job is another site’s.");
    case "ends-before-it-starts":
      return i18n.t("It ends before it starts.");
    case "one-of-area-task-job":
      return i18n.t("Choose what it was made to: one area, one task or one job.");
    case "instrument-reserved-already":
      return i18n.t("Another survey has reserved one of these instruments on those days.");
    case "instrument-of-other-site":
      return i18n.t("This instrument belongs to another site.");
    case "worker-twice":
      return i18n.t("This worker stands here twice.");
    case "task-needed":
      return i18n.t("Task by task, each line needs its task.");
    case "cycle-needed":
      return i18n.t("Say how long a cycle of the noise is.");
    case "cycle-of-cyclic-only":
      return i18n.t("Only noise in cycles has the length of one.");
    case "no-task-by-job":
      return i18n.t("By job or by full days, samples are of the whole and of no one task.");
    case "strategy-fixed":
      return i18n.t(
        "Samples have been taken by this strategy: it stays. Plan another survey instead.",
      );
    case "not-of-this-target":
      return i18n.t("These samples are another task’s.");
    case "no-samples-yet":
      return i18n.t("There is no sample that counts yet.");
    case "beyond-the-history":
      return i18n.t("This stretch reaches beyond the history.");
    case "stretches-overlap":
      return i18n.t("It overlaps another stretch of the same kind.");
    case "everything-left-out":
      return i18n.t("Nothing would be left that counts.");
    case "run-or-worker-needed":
      return i18n.t("Say whose history it is.");
    case "run-of-other-instrument":
      return i18n.t("That run was made with another instrument.");
    case "above-bone-conduction":
      return impossibleTrialText(i18n, issue.params);
    case "no-trial":
      return i18n.t("At least one trial of one ear is needed.");
    case "size-unknown":
      return i18n.t("This protector does not come in that size.");
    case "not-with-gear":
      return i18n.t("It can’t be worn with what is worn beside it. Take another.");
    case "cannot-be-worn":
      return i18n.t("This worker cannot wear it. Take another, or test its fit anew first.");
    case "no-data-no-fit":
      return i18n.t(
        "Its data say nothing of this noise. Test the fit first: it goes out once that reaches what is needed.",
      );
    case "fit-not-passed":
      return i18n.t("This fit did not pass: say why it goes out all the same.");
    case "fit-not-assessed":
      return i18n.t("This fit is not assessed for one ear: say why it goes out all the same.");
    case "one-kind-offered":
      return i18n.t("Only one kind was on offer. Offer another, or say why not.");
    case "more-than-in-stock":
      return i18n.t(
        "{stock, plural, =0 {None is} one {# is} other {# are}} in stock. Enter what came in first, or count what is there.",
        { stock: Number(params.stock) },
      );
    case "none-in-stock":
      return i18n.t("None of this size is in stock. Say why it goes out all the same.");
    case "issued-not-offered":
      return i18n.t("What is handed out has to be among what was offered.");
    case "fit-of-another":
      return i18n.t("That fit is another worker’s, another protector’s or another size’s.");
    case "one-part-off":
      return i18n.t("One pair with the active part off is needed, and at most one with it on.");
    case "channel-named-twice":
      return i18n.t("The same channel stands for two microphones.");
    case "task-has-no-spectrum":
      return i18n.t("This task’s level has no octave bands.");
    case "not-the-other-ear":
      return i18n.t("That test is not the other ear’s of the same day and protector.");
    case "tone-unknown":
      return i18n.t("There is no tone of this channel.");
    case "not-at-site":
      return i18n.t("Nobody at this site works or worked for that employer.");
    default:
      return i18n.t("This needs another look.");
  }
}
