import { parentPort } from 'node:worker_threads';
import { simulateNetwork } from './one-network.mjs';

parentPort.on('message', ({ index, task }) => {
  parentPort.postMessage({ index, result: simulateNetwork(task) });
});
