// Pure: no I/O, no clock, no hidden randomness.
// Published index equations with their coefficients. "Confirmed in transcriptions" and "from memory" say how the
// coefficients could be checked; the printed tables themselves were not at hand.
import {
  type DispersionForm,
  edwardsLawrenceForm,
  jundtForm,
  katoForm,
  ktpForm,
  type ThermoOptic,
  threeTermForm,
} from "./dispersion_forms.ts";

/** One index equation with its origin. Wavelengths in µm, temperatures in °C, as printed. */
export interface SellmeierSet extends DispersionForm {
  readonly crystal: "congruent LiNbO3" | "5% MgO:LiNbO3" | "KTP";
  readonly axis: "x" | "y" | "z" | "o" | "e";
  readonly source: string;
  /** Wavelengths for which the equation was published, µm. */
  readonly published_um: readonly [number, number];
  /** Wavelengths for which its temperature part was published, µm, if narrower. */
  readonly thermal_um?: readonly [number, number];
  /** Temperatures for which it was published, °C; a single value if it has no temperature part. */
  readonly published_c?: readonly [number, number];
  readonly note?: string;
}

const JUNDT = "D. H. Jundt, Opt. Lett. 22, 1553 (1997)";
const EDWARDS_LAWRENCE = "G. J. Edwards & M. Lawrence, Opt. Quantum Electron. 16, 373 (1984)";
const ZELMON = "D. E. Zelmon, D. L. Small & D. Jundt, J. Opt. Soc. Am. B 14, 3319 (1997)";
const GAYER =
  "O. Gayer, Z. Sacks, E. Galun & A. Arie, Appl. Phys. B 91, 343 (2008); erratum Appl. Phys. B 101, 481 (2010)";
const KATO = "K. Kato & E. Takaoka, Appl. Opt. 41, 5040 (2002)";
const EMANUELI_ARIE = "S. Emanueli & A. Arie, Appl. Opt. 42, 6661 (2003)";
const FAN = "T. Y. Fan et al., Appl. Opt. 26, 2390 (1987)";

const thermalY: ThermoOptic = {
  a: [6.2897e-6, 6.3061e-6, -6.0629e-6, 2.6486e-6],
  b: [-1.4445e-9, 2.2244e-8, -3.5770e-8, 1.3470e-8],
};
const thermalZ: ThermoOptic = {
  a: [9.9587e-6, 9.9228e-6, -8.9603e-6, 4.1010e-6],
  b: [-1.1882e-8, 1.0459e-7, -9.8136e-8, 3.1481e-8],
};

/** Every set, by id. Only some of them are a material's index (`refractiveIndex`); the others are cross-checks. */
export const SELLMEIER_SETS = {
  /** n_e of congruent LiNbO3; confirmed in transcriptions. */
  jundt_e: {
    crystal: "congruent LiNbO3",
    axis: "e",
    source: JUNDT,
    published_um: [0.4, 5],
    published_c: [20, 250],
    ...jundtForm([5.35583, 0.100473, 0.20692, 100, 11.34927, 1.5334e-2], [
      4.629e-7,
      3.862e-8,
      -0.89e-8,
      2.657e-5,
    ]),
  },
  /** n_o of congruent LiNbO3; confirmed in transcriptions, two others of which swap the rows o and e. Range from memory. */
  el_o: {
    crystal: "congruent LiNbO3",
    axis: "o",
    source: EDWARDS_LAWRENCE,
    published_um: [0.4, 4],
    ...edwardsLawrenceForm([4.9048, 0.11775, 0.21802, 0.027153], [2.2314e-8, -2.9671e-8, 2.1429e-8]),
  },
  /** n_e of congruent LiNbO3, cross-check. */
  el_e: {
    crystal: "congruent LiNbO3",
    axis: "e",
    source: EDWARDS_LAWRENCE,
    published_um: [0.4, 4],
    ...edwardsLawrenceForm([4.582, 0.09921, 0.2109, 0.02194], [5.2716e-8, -4.9143e-8, 2.2971e-7]),
  },
  zel_cln_o: {
    crystal: "congruent LiNbO3",
    axis: "o",
    source: ZELMON,
    published_um: [0.4, 5],
    published_c: [21, 21],
    ...threeTermForm([2.6734, 0.01764, 1.2290, 0.05914, 12.614, 474.6]),
  },
  zel_cln_e: {
    crystal: "congruent LiNbO3",
    axis: "e",
    source: ZELMON,
    published_um: [0.4, 5],
    published_c: [21, 21],
    ...threeTermForm([2.9804, 0.02047, 0.5981, 0.0666, 8.9543, 416.08]),
  },
  zel_mg_o: {
    crystal: "5% MgO:LiNbO3",
    axis: "o",
    source: ZELMON,
    published_um: [0.4, 5],
    published_c: [21, 21],
    note: "the printed columns o and e of the doped crystal are said to be interchanged; put right here",
    ...threeTermForm([2.4272, 0.01478, 1.4617, 0.05612, 9.6536, 371.216]),
  },
  zel_mg_e: {
    crystal: "5% MgO:LiNbO3",
    axis: "e",
    source: ZELMON,
    published_um: [0.4, 5],
    published_c: [21, 21],
    note: "the printed columns o and e of the doped crystal are said to be interchanged; put right here",
    ...threeTermForm([2.2454, 0.01242, 1.3005, 0.05313, 6.8972, 331.33]),
  },
  gayer5_e: {
    crystal: "5% MgO:LiNbO3",
    axis: "e",
    source: GAYER,
    published_um: [0.5, 4],
    published_c: [24.5, 200],
    note: "fitted to phase matching: the absolute dn/dT is not physical",
    ...jundtForm([5.756, 0.0983, 0.2020, 189.32, 12.52, 1.32e-2], [2.860e-6, 4.700e-8, 6.113e-8, 1.516e-4]),
  },
  gayer5_o: {
    crystal: "5% MgO:LiNbO3",
    axis: "o",
    source: GAYER,
    published_um: [0.5, 1.7],
    published_c: [24.5, 200],
    note: "a1 = 5.653 (5.6533 in one open database, 6.7e-5 in n)",
    ...jundtForm([5.653, 0.1185, 0.2091, 89.61, 10.85, 1.97e-2], [7.941e-7, 3.134e-8, -4.641e-9, -2.188e-6]),
  },
  kato_x: {
    crystal: "KTP",
    axis: "x",
    source: KATO,
    published_um: [0.43, 3.54],
    thermal_um: [0.43, 1.58],
    ...katoForm([3.2910, 0.04140, 0.03978, 9.35522, 31.45571], [0.1717, -0.5353, 0.8416, 0.1627]),
  },
  kato_y: {
    crystal: "KTP",
    axis: "y",
    source: KATO,
    published_um: [0.43, 3.54],
    thermal_um: [0.43, 1.58],
    ...katoForm([3.45018, 0.04341, 0.04597, 16.98825, 39.43799], [0.1997, -0.4063, 0.5154, 0.5425]),
  },
  kato_z: {
    crystal: "KTP",
    axis: "z",
    source: KATO,
    published_um: [0.43, 3.54],
    thermal_um: [0.53, 1.57],
    note: "the paper has a second thermo-optic equation beyond 1.32 µm, not used here",
    ...katoForm([4.59423, 0.06206, 0.04763, 110.80672, 86.12171], [0.9221, -2.9220, 3.6677, -0.1897]),
  },
  /** n_y of KTP; confirmed in transcriptions. The thermo-optic range is from memory. */
  ktp_y: {
    crystal: "KTP",
    axis: "y",
    source: `F. König & F. N. C. Wong, Appl. Phys. Lett. 84, 1644 (2004), with ${EMANUELI_ARIE}`,
    published_um: [1.2, 3.5],
    thermal_um: [0.532, 1.585],
    note: "made for the near infrared; other programs take Fan et al. below 1.2 µm",
    ...ktpForm([2.09930, 0.922683, 0.0467695, 0, 0, 0.0138408], thermalY),
  },
  /** n_z of KTP; confirmed in transcriptions. Both ranges are from memory. */
  ktp_z: {
    crystal: "KTP",
    axis: "z",
    source: `K. Fradkin et al., Appl. Phys. Lett. 74, 914 (1999), with ${EMANUELI_ARIE}`,
    published_um: [0.45, 3.5],
    thermal_um: [0.532, 1.585],
    ...ktpForm([2.12725, 1.18431, 0.0514852, 0.6603, 100.00507, 0.00968956], thermalZ),
  },
  fan_x: {
    crystal: "KTP",
    axis: "x",
    source: FAN,
    published_um: [0.4, 1.1],
    note: "flux-grown, about 22 °C; from memory",
    ...ktpForm([2.16747, 0.83733, 0.04611, 0, 0, 0.01713], null),
  },
  fan_y: {
    crystal: "KTP",
    axis: "y",
    source: FAN,
    published_um: [0.4, 1.1],
    note: "flux-grown, about 22 °C",
    ...ktpForm([2.19229, 0.83547, 0.04970, 0, 0, 0.01621], null),
  },
  fan_z: {
    crystal: "KTP",
    axis: "z",
    source: FAN,
    published_um: [0.4, 1.1],
    note: "flux-grown, about 22 °C; from memory",
    ...ktpForm([2.25411, 1.06543, 0.05486, 0, 0, 0.02140], null),
  },
} satisfies Record<string, SellmeierSet>;

export type SellmeierId = keyof typeof SELLMEIER_SETS;
