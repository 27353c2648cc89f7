/**
 * Against values that tests of a public mapping library publish (METHODS A15, tagged F), against
 * Vincenty's line from Flinders Peak to Buninyong, and against GeographicLib's geodesics.
 */
import fc from 'fast-check';
import * as geodesic from 'geographiclib-geodesic';
import { describe, expect, it } from 'vitest';
import { earthFromGeodetic, geodeticFromEarth, geodeticFromLocal, localFromGeodetic } from '../../hil-sim/geodesy.ts';

const origin = { latDeg: 42, lonDeg: -82, heightM: 200 };

describe('earthFromGeodetic', () => {
  it('gives the published coordinates of 42 N 82 W at 200 m', () => {
    const [x, y, z] = earthFromGeodetic(origin);
    expect(x).toBeCloseTo(660_675.2518247, 6);
    expect(y).toBeCloseTo(-4_700_948.68316, 5);
    expect(z).toBeCloseTo(4_245_737.66222, 5);
  });
});

describe('geodeticFromEarth', () => {
  it('gives the published place of an aer target', () => {
    const place = geodeticFromEarth([660_930.192761, -4_701_424.222957, 4_246_579.604633]);
    expect(place.latDeg).toBeCloseTo(42.002582, 6);
    expect(place.lonDeg).toBeCloseTo(-81.997752, 6);
    expect(place.heightM).toBeCloseTo(1139.7018, 3);
  });
});

describe('localFromGeodetic', () => {
  it('gives the published east, north, up of a second station', () => {
    const local = localFromGeodetic(origin, { latDeg: 42.1, lonDeg: -81.9, heightM: 300 });
    expect(local.eastM).toBeCloseTo(8272.476048, 5);
    expect(local.northM).toBeCloseTo(11_112.773942, 5);
    expect(local.upM).toBeCloseTo(84.941624, 5);
  });

  it('gives the recomputed plane at 50 N 1.5 W (METHODS A15)', () => {
    const datum = { latDeg: 50, lonDeg: -1.5, heightM: 0 };
    const local = localFromGeodetic(datum, { latDeg: 50.01, lonDeg: -1.49, heightM: 0 });
    expect(local.eastM).toBeCloseTo(716.80881, 4);
    expect(local.northM).toBeCloseTo(1112.33952, 4);
    expect(local.upM).toBeCloseTo(-0.13727, 4);
  });

  it('agrees with the metres per degree of the ellipsoid (METHODS A15)', () => {
    const perDegree: [number, number, number][] = [
      [0, 110_574.276, 111_319.491], [45, 111_131.777, 78_846.835], [60, 111_412.287, 55_800.002],
    ];
    for (const [latDeg, latM, lonM] of perDegree) {
      const datum = { latDeg, lonDeg: 10, heightM: 0 };
      const step = 1e-4;
      expect(localFromGeodetic(datum, { ...datum, latDeg: latDeg + step }).northM / step / latM).toBeCloseTo(1, 5);
      expect(localFromGeodetic(datum, { ...datum, lonDeg: 10 + step }).eastM / step / lonM).toBeCloseTo(1, 5);
    }
  });

  it('agrees with GeographicLib on distance and bearing within a few kilometres', () => {
    const { WGS84 } = geodesic.Geodesic;
    const datum = { latDeg: 58.4021, lonDeg: -9.531, heightM: 0 };
    const places = fc.record({ lat: fc.double({ min: -0.03, max: 0.03, noNaN: true }), lon: fc.double({ min: -0.05, max: 0.05, noNaN: true }) });
    fc.assert(fc.property(places, ({ lat, lon }) => {
      const place = { latDeg: datum.latDeg + lat, lonDeg: datum.lonDeg + lon, heightM: 0 };
      const local = localFromGeodetic(datum, place);
      const line = WGS84.Inverse(datum.latDeg, datum.lonDeg, place.latDeg, place.lonDeg);
      const chordM = Math.sqrt(local.eastM ** 2 + local.northM ** 2 + local.upM ** 2);
      // Arc against chord of a 5 km line: s³/24R² is 1.3e-4 m.
      expect(Math.abs(chordM - line.s12!)).toBeLessThan(2e-4);
      if (line.s12! > 10) {
        const bearingDeg = (Math.atan2(local.eastM, local.northM) * 180) / Math.PI;
        const difference = ((bearingDeg - line.azi1! + 540) % 360) - 180;
        expect(Math.abs(difference)).toBeLessThan(1e-4);
      }
    }));
  });

  it('knows where Buninyong lies from Flinders Peak (Vincenty 1975)', () => {
    // The chord of the published 54 972.271 m line; azimuth 306°52′05.37″.
    const peak = { latDeg: -(37 + 57 / 60 + 3.7203 / 3600), lonDeg: 144 + 25 / 60 + 29.5244 / 3600, heightM: 0 };
    const town = { latDeg: -(37 + 39 / 60 + 10.1561 / 3600), lonDeg: 143 + 55 / 60 + 35.3839 / 3600, heightM: 0 };
    const local = localFromGeodetic(peak, town);
    const chordM = Math.sqrt(local.eastM ** 2 + local.northM ** 2 + local.upM ** 2);
    // Arc minus chord is s³/24R² = 0.170 m for a sphere of 6 371 km.
    expect(chordM + 54_972.271 ** 3 / (24 * 6_371_000 ** 2)).toBeCloseTo(54_972.271, 1);
    const bearingDeg = (Math.atan2(local.eastM, local.northM) * 180) / Math.PI + 360;
    expect(bearingDeg).toBeCloseTo(306 + 52 / 60 + 5.37 / 3600, 2);
  });
});

describe('geodeticFromLocal', () => {
  it('undoes localFromGeodetic', () => {
    const within = fc.double({ min: -5000, max: 5000, noNaN: true });
    fc.assert(fc.property(within, within, fc.double({ min: -60, max: 60, noNaN: true }), (eastM, northM, latDeg) => {
      const datum = { latDeg, lonDeg: 3, heightM: 0 };
      const back = localFromGeodetic(datum, geodeticFromLocal(datum, { eastM, northM, upM: -40 }));
      expect(Math.abs(back.eastM - eastM) + Math.abs(back.northM - northM) + Math.abs(back.upM + 40)).toBeLessThan(1e-7);
    }));
  });
});
