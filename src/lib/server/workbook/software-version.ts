import { version } from '../../../../package.json';

/** Version of this service, printed on every export. */
export const SOFTWARE_VERSION: string = version;
