"use strict";

// The equations of the measurement, as irsurvey.radiometry and irsurvey.heat have them: radiance of a band, the air
// path, humid air, the measurement equation and its inverse, heat leaving a surface.  Everything in SI units [K, m, s,
// W, Pa, fractions]; NaN where there is no solution.  Tables and coefficients come with the page, in live-tables.
const Physics = (() => {
  const ITERATIONS = 6;
  const ROUNDING = 1e-12; // of 1 − τw − ρw
  // Sonntag (1990) over liquid water, WMO-No. 8, for −45…60 °C
  const SONNTAG = { pressure: 611.2, slope: 17.62, shift: 243.12, lowest: -45, highest: 60 };

  // A band's table: radiance at every 0.1 K from its logarithms at every 5 K, by cubics through four of them.
  function bandTable(band) {
    const per = Math.round(band.step / band.fine);
    const last = band.logs.length - 1;
    const radiance = new Float64Array(last * per + 1);
    for (let k = 0; k < radiance.length; k += 1) {
      const from = Math.min(Math.max(Math.floor(k / per) - 1, 0), last - 3);
      const x = k / per - from;
      const [a, b, c, d] = band.logs.slice(from, from + 4);
      const log = -a * (x - 1) * (x - 2) * (x - 3) / 6 + b * x * (x - 2) * (x - 3) / 2
        - c * x * (x - 1) * (x - 3) / 2 + d * x * (x - 1) * (x - 2) / 6;
      radiance[k] = Math.exp(log);
    }
    return { first: band.first, step: band.fine, radiance, air: band.air };
  }

  function radiance(table, t) {
    const place = (t - table.first) / table.step;
    const last = table.radiance.length - 1;
    if (!(place >= 0 && place <= last)) return NaN;
    const k = Math.min(Math.floor(place), last - 1);
    return table.radiance[k] + (place - k) * (table.radiance[k + 1] - table.radiance[k]);
  }

  function temperature(table, wanted) {
    const values = table.radiance;
    let low = 0;
    let high = values.length - 1;
    if (!(wanted >= values[0] && wanted <= values[high])) return NaN;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (values[middle] <= wanted) low = middle;
      else high = middle;
    }
    return table.first + table.step * (low + (wanted - values[low]) / (values[high] - values[low]));
  }

  function vapourDensity(tAir, humidity, constants) {
    const celsius = tAir - constants.zero_celsius;
    if (!(humidity >= 0 && humidity <= 1 && celsius >= SONNTAG.lowest && celsius <= SONNTAG.highest)) return NaN;
    const saturation = SONNTAG.pressure * Math.exp(SONNTAG.slope * celsius / (SONNTAG.shift + celsius));
    return humidity * saturation / (constants.vapour_gas * tAir);
  }

  // Absorptance of an air path as [constant, linear, square] in x = ln(T_source/reference).
  function absorptance(path, fit, constants) {
    const { distance, tAir, vapour, pressure, excess } = path;
    if (!(distance >= 0)) return [NaN, NaN, NaN];
    if (distance === 0) return [0, 0, 0];
    const compression = pressure / constants.standard_pressure;
    const theta = 296 / tAir;
    const line = vapour * distance * compression ** fit.a * theta ** fit.b;
    const cold = Math.min(Math.max((296 - tAir) / 36, 0), 1);
    const continuum = vapour * distance * (vapour / 0.010) * (1 + fit.mu * cold);
    const gas = distance / 100 * compression ** fit.c * theta ** fit.d;
    const terms = [0, 0, 0];
    for (let part = 0; part < 3; part += 1) {
      const depth = (line * fit.k[part]) ** fit.n[part] + continuum * fit.s[part] + (gas * fit.q[part]) ** fit.m[part];
      const absorbed = -Math.expm1(-depth) * (1 + excess);
      for (let power = 0; power < 3; power += 1) terms[power] += absorbed * fit.shares[part][power];
    }
    return terms;
  }

  function absorbed(air, t, source) {
    const x = Math.log(Math.min(Math.max(t, source.low), source.high) / source.reference);
    return air[0] + x * (air[1] + x * air[2]);
  }

  function transmittance(t, path, table, shared) {
    return 1 - absorbed(absorptance(path, table.air, shared.constants), t, shared.source);
  }

  // One scene in numbers: L = gain·τ(To)·L(To) + rest.  ISO 18434-1:2008; window: ASTM E1897.
  function terms(emissivity, tReflected, path, table, shared) {
    const air = absorptance(path, table.air, shared.constants);
    const tau = path.windowTransmittance;
    const rho = path.windowReflectance;
    const own = 1 - tau - rho;
    const possible = emissivity > 0 && emissivity <= 1 && tau > 0 && rho >= 0 && own > -ROUNDING;
    const through = (t) => 1 - absorbed(air, t, shared.source);
    const weighted = (weight, value) => (Math.abs(weight) < ROUNDING ? 0 : weight * value());
    const reflected = weighted(1 - emissivity, () => radiance(table, tReflected) * through(tReflected));
    const ofAir = path.distance === 0 ? 0 : (1 - through(path.tAir)) * radiance(table, path.tAir);
    const ofWindow = weighted(own, () => radiance(table, path.tWindow))
      + weighted(rho, () => radiance(table, path.tWindowAmbient));
    return { table, through, gain: possible ? tau * emissivity : NaN, rest: tau * (reflected + ofAir) + ofWindow };
  }

  function apparentTemperature(tObject, scene) {
    return temperature(scene.table, scene.gain * radiance(scene.table, tObject) * scene.through(tObject) + scene.rest);
  }

  function objectTemperature(tApparent, scene) {
    const emitted = (radiance(scene.table, tApparent) - scene.rest) / scene.gain;
    if (!(emitted > 0)) return NaN;
    let t = tApparent;
    for (let k = 0; k < ITERATIONS; k += 1) t = temperature(scene.table, emitted / scene.through(t));
    return t;
  }

  // Heat leaving the surface seen [W m⁻²]: h(Ts − Ta) + εσ(Ts⁴ − Tr⁴), the convective coefficient h given.  ISO 6946.
  function surfaceFlux(t, around, constants) {
    return around.film * (t - around.tAir)
      + around.emissivity * constants.stefan_boltzmann * (t ** 4 - around.tRadiant ** 4);
  }

  // Temperature factor the same wall would have at the film resistance that limits assume.  ISO 13788, ISO 10211.
  function factorAtLimit(t, factor, around, constants) {
    const radiative = around.emissivity * constants.stefan_boltzmann
      * (t + around.tRadiant) * (t ** 2 + around.tRadiant ** 2);
    const seen = 1 / (around.film + radiative);
    const whole = seen * factor + constants.limit_resistance * (1 - factor);
    return whole > 0 && seen > 0 ? seen * factor / whole : NaN;
  }

  return {
    bandTable, radiance, temperature, vapourDensity, transmittance, terms, apparentTemperature, objectTemperature,
    surfaceFlux, factorAtLimit,
  };
})();
