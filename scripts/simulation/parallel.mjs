import { Worker } from 'node:worker_threads';

/**
 * Runs tasks in worker threads and returns their results in the order of the tasks, whichever thread took them.
 *
 * @param {URL} script  answers every posted task with its result
 * @param {readonly unknown[]} tasks
 * @param {number} workerCount
 * @param {(done: number) => void} onDone
 */
export function runInWorkers(script, tasks, workerCount, onDone) {
  const results = new Array(tasks.length);
  let next = 0;
  let done = 0;
  return new Promise((resolve, reject) => {
    const workers = Array.from({ length: Math.min(workerCount, tasks.length) }, () => new Worker(script));
    const stop = () => Promise.all(workers.map((worker) => worker.terminate()));
    const hand = (worker) => {
      if (next < tasks.length) worker.postMessage({ index: next, task: tasks[next++] });
    };
    for (const worker of workers) {
      worker.on('message', ({ index, result }) => {
        results[index] = result;
        done += 1;
        onDone(done);
        if (done === tasks.length) stop().then(() => resolve(results), reject);
        else hand(worker);
      });
      worker.on('error', (error) => stop().then(() => reject(error), reject));
      hand(worker);
    }
  });
}
