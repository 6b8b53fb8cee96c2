/** Now, as it stands beside a correction until the service has signed it. */
export const stamp = (): string => new Date().toISOString();
