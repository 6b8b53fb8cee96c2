/** Page and service ask for the same sentence: the service makes no run without it. */
export { sentenceToConfirm } from '$lib/assay';
