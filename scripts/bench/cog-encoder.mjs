// A worker thread of the COG benchmark: cuts blocks out of shared bands and encodes them, as grid workers do with the
// blocks they predicted.
import { parentPort, workerData } from 'node:worker_threads';
import { blockTransferList, encodeCogBlock } from 'rainprint/raster';

const { bands, format } = workerData;

parentPort.on('message', ({ blockColumn, blockRow }) => {
  const { width, height, tileSizePx } = format;
  const [left, top] = [blockColumn * tileSizePx, blockRow * tileSizePx];
  const [blockWidth, blockHeight] = [Math.min(tileSizePx, width - left), Math.min(tileSizePx, height - top)];
  const block = bands.map((band) => {
    const out = new Float32Array(blockWidth * blockHeight);
    for (let row = 0; row < blockHeight; row++) {
      const from = (top + row) * width + left;
      out.set(band.subarray(from, from + blockWidth), row * blockWidth);
    }
    return out;
  });
  const encoded = encodeCogBlock(block, blockWidth, blockHeight, format);
  parentPort.postMessage({ blockColumn, blockRow, encoded }, blockTransferList(encoded));
});
