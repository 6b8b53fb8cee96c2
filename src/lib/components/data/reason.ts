/** A reason that a later reader can use: five letters at the least, as the service asks. */
export const enoughReason = (reason: string): boolean => (reason.match(/\p{L}/gu) ?? []).length >= 5;
