import { foundation } from "./20261201090000-foundation";
import { peopleAndWork } from "./20261201090100-people-and-work";
import { evidence } from "./20261201090200-evidence";
import { resultsAndFindings } from "./20261201090300-results-and-findings";
import { indexes } from "./20261201090400-indexes";
import { measurements } from "./20261201100000-measurements";
import { rulesChangedSteps } from "./20261201110000-rules-changed-steps";
import { historyImports } from "./20261201120000-history-imports";
import { recordings } from "./20261201130000-recordings";
import { atEarBounds } from "./20261201140000-at-ear-bounds";
import { protectorsAndFit } from "./20261201150000-protectors-and-fit";
import { microphoneCheckSpectrum } from "./20261201151000-microphone-check-spectrum";
import { issueReason } from "./20261201152000-issue-reason";
import { samplingPatterns } from "./20261201160000-sampling-patterns";
import { protectorsLookedAt } from "./20261201161000-protectors-looked-at";
import { boundsOfFigures } from "./20261201170000-bounds-of-figures";
import { leftOutTime } from "./20261201171000-left-out-time";
import { rowTrail } from "./20261202090000-row-trail";
import { firstFits } from "./20261202090500-first-fits";
import { followUp } from "./20261202092000-follow-up";
import { training } from "./20261202092100-training";
import { calendarFeeds } from "./20261202092200-calendar-feeds";
import { resultLetters } from "./20261202094000-result-letters";
import { plans } from "./20261202096000-plans";
import { timetables } from "./20261202100100-timetables";
import { visitors } from "./20261202110000-visitors";
import { recordReads } from "./20261202110100-record-reads";
import { apiTokens } from "./20261202110200-api-tokens";
import { groupMappings } from "./20261202110300-group-mappings";
import { recordDraws } from "./20261202140000-record-draws";
import { employerDuties } from "./20261203110000-employer-duties";
import { representatives } from "./20261203111000-representatives";
import { employerGrants } from "./20261203112000-employer-grants";
import { undoneSteps } from "./20261203120000-undone-steps";
import { absencesAndLoans } from "./20261203120100-absences-and-loans";
import { handOvers } from "./20261203120200-hand-overs";
import { digests } from "./20261203120300-digests";
import { yearReports } from "./20261203130000-year-reports";
import { trailKeepers } from "./20261203140000-trail-keepers";
import { retention } from "./20261203140100-retention";
import { mailEvents } from "./20261203150000-mail-events";
import { mailChoices } from "./20261203150100-mail-choices";
import { bouncesOfOtherMails } from "./20261203150200-bounces-of-other-mails";
import { recordTransfers } from "./20261203160000-record-transfers";
import { administratorsOfAllSites } from "./20261203170000-administrators-of-all-sites";

/** In the order in which they run. */
export const migrations = [
  foundation,
  peopleAndWork,
  evidence,
  resultsAndFindings,
  indexes,
  measurements,
  rulesChangedSteps,
  historyImports,
  recordings,
  atEarBounds,
  protectorsAndFit,
  microphoneCheckSpectrum,
  issueReason,
  samplingPatterns,
  protectorsLookedAt,
  boundsOfFigures,
  leftOutTime,
  rowTrail,
  firstFits,
  resultLetters,
  followUp,
  training,
  calendarFeeds,
  plans,
  timetables,
  visitors,
  recordReads,
  apiTokens,
  groupMappings,
  recordDraws,
  undoneSteps,
  absencesAndLoans,
  handOvers,
  digests,
  yearReports,
  trailKeepers,
  mailEvents,
  mailChoices,
  bouncesOfOtherMails,
  retention,
  employerDuties,
  representatives,
  employerGrants,
  recordTransfers,
  administratorsOfAllSites,
];
