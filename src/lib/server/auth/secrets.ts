import { randomBytes } from 'node:crypto';
import { sha256 } from '../audit/canonical';

/** A secret for a link or a token: 256 random bits, so that its plain hash is enough to store. */
export const newSecret = (): string => randomBytes(32).toString('base64url');

export const secretHash = (secret: string): string => sha256(secret);
