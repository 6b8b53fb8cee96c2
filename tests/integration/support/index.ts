export * from './database';
export * from './people';
