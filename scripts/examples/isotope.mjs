// Deuterium excess of a pair and its error: the shared error of the two isotopes cancels.
import { dExcess, dExcessSd } from 'rainprint/isotope';

console.log(`d = ${dExcess(-8.1, -54.3).toFixed(1)} ‰`);
console.log(
  `SD with correlation 0.95: ${dExcessSd(8, 1, 0.95).toFixed(2)} ‰; taken as independent: ${dExcessSd(8, 1, 0).toFixed(2)} ‰`,
);
