export * from './database';
export * from './people';
export * from './refusal';
