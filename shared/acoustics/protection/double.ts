/** What the second protector adds to the better of two, dB. @source osha-otm III:5 */
export const SECOND_PROTECTOR_DB = 5;

/**
 * Attenuation of two protectors worn together by the US rule, dB: five more than the better one, added after its
 * derating.
 *
 * @source osha-otm III:5
 * @source niosh-98-126 6
 */
export function doubleAttenuationDb(firstDb: number, secondDb: number): number {
  return Math.max(firstDb, secondDb) + SECOND_PROTECTOR_DB;
}
