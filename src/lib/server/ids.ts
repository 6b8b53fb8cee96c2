const UUID = /^[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}$/;

/** Whether a text can be a key of ours at all; what cannot is answered like what is not there. */
export const isId = (text: unknown): text is string => typeof text === 'string' && UUID.test(text);
