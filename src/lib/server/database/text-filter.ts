import { Op } from 'sequelize';

/** Words of a text filter; more than eight are not looked for. */
export const wordsOf = (filter = ''): string[] => filter.trim().split(/\s+/).filter(Boolean).slice(0, 8);

/** The wildcards of LIKE, typed as text, stand for any one character: near enough for finding, and portable. */
export const containing = (word: string) => ({ [Op.like]: `%${word.replace(/[%_\\]/g, '_')}%` });
