export * from './network.js';
export * from './table/index.js';
