export { ComplexMatrix, largestSingularValue } from './complex-matrix.js';
export {
  addAdjointProduct,
  addProduct,
  type ComplexArray,
  complexArray,
  type Place,
} from './complex-products.js';
export { eliminate, identity, multiplyMatrices, solveLinear } from './matrix.js';
export { discretizeHeld, exponentiate } from './matrix-exponential.js';
export {
  degree,
  dividePolynomials,
  evaluatePolynomial,
  multiplyPolynomials,
  type Polynomial,
  trimPolynomial,
} from './polynomial.js';
export { type ComplexNumber, findRoots } from './roots.js';
