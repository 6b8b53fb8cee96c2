/** Stored with every result; raised whenever a change could alter a digit of one. */
export const ENGINE_VERSION = '1.1.0';
