import { expect, it } from 'vitest';
import { measureRoundTrip } from '../support/roundTrip.js';

it('fit → scenario → simulate → fit returns friction within 8 % and noise within 5 %', async () => {
  // Scatter of the second fit: the bound for 60 000 positions spread over a dozen splines is some 4 % per spline
  // (`frictionPrecisionBound`); the table of `npm run study:resimulation` has two dimensions too.
  const { friction, noise, positions } = await measureRoundTrip(1);
  expect(positions).toBe(60_000);
  expect(friction).toBeLessThan(0.08);
  expect(noise).toBeLessThan(0.05);
});
