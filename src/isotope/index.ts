export { dExcess, dExcessSd, dExcessVariance } from './d-excess.js';
