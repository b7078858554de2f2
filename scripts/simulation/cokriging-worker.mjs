import { parentPort } from 'node:worker_threads';
import { compareWithCokriging } from './cokriging-network.mjs';

parentPort.on('message', ({ index, task }) => {
  parentPort.postMessage({ index, result: compareWithCokriging(task) });
});
