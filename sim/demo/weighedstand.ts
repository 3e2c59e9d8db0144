/**
 * The door drive probe with what one might have bought instead: a series shunt and a transformer winding, weighed on the
 * same currents. Numbers are invented for this project.
 */
import { DOOR_STAND } from './doorstand.ts';

export const WEIGHED_STAND = {
  ...DOOR_STAND,
  name: 'Door drive probe, weighed',
  shunt: {
    resistance_mOhm: { nominal: 2.5, tolerance: 0.0125 }, tempco_ppm_per_K: 50, thermalResistance_K_per_W: 20, timeConstant_s: 8,
    gain: 20, noise_nV_per_rtHz: 20, bandwidth_kHz: 50,
  },
  transformer: {
    turns: 1000, burden_ohm: 10, winding_ohm: 40, magnetising_mH: { nominal: 3000, tolerance: 600 }, saturation_V_ms: 30,
    bandwidth_kHz: 100,
  },
};
