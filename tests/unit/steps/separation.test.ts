import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { separationComponents } from '../../../processing/steps/separation';

describe('separationComponents', () => {
  it('calls an analyser east of the sonic downwind in a west wind and upwind in an east wind', () => {
    const east = { northM: 0, eastM: 0.3, upM: -0.1 };
    expect(separationComponents(east, 270).alongM).toBeCloseTo(0.3, 14);
    expect(separationComponents(east, 90).alongM).toBeCloseTo(-0.3, 14);
    expect(separationComponents(east, 270).acrossM).toBeCloseTo(0, 14);
    expect(separationComponents(east, 270).upM).toBe(-0.1);
  });

  it('puts an analyser north of the sonic to the left in a west wind', () => {
    // Blowing towards east, the left hand points north.
    expect(separationComponents({ northM: 0.2, eastM: 0, upM: 0 }, 270).acrossM).toBeCloseTo(0.2, 14);
    expect(separationComponents({ northM: 0.2, eastM: 0, upM: 0 }, 180).alongM).toBeCloseTo(0.2, 14);
  });

  it('keeps the horizontal distance for every direction', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -5, max: 5, noNaN: true }),
        fc.double({ min: -5, max: 5, noNaN: true }),
        fc.double({ min: 0, max: 360, noNaN: true }),
        (northM, eastM, direction) => {
          const { alongM, acrossM } = separationComponents({ northM, eastM, upM: 0 }, direction);
          expect(Math.hypot(alongM, acrossM)).toBeCloseTo(Math.hypot(northM, eastM), 12);
        },
      ),
    );
  });

  it('has no components while the direction is unknown, except the vertical one', () => {
    const calm = separationComponents({ northM: 0.2, eastM: 0.1, upM: 0.05 }, Number.NaN);
    expect(calm.alongM).toBeNaN();
    expect(calm.acrossM).toBeNaN();
    expect(calm.upM).toBe(0.05);
  });
});
