/**
 * Brazing fillers for coil joints. Compositions and melting ranges as printed in Machinery's Handbook (31st edition)
 * after AWS A5.8 (1981 edition), read in a secondary copy. Fillers with cadmium are listed so that they are
 * recognised and refused: their fume is poisonous.
 */
export interface Filler {
  /** Class of AWS A5.8. */
  name: string;
  composition: string;
  solidusC: number;
  liquidusC: number;
  cadmium: boolean;
  /** Copper–phosphorus fillers flux themselves on copper only, never on steel or nickel (common practice). */
  selfFluxingOnCopper: boolean;
}

const fahrenheit = (f: number) => ((f - 32) * 5) / 9;
const filler = (name: string, composition: string, solidusF: number, liquidusF: number): Filler => ({
  name,
  composition,
  solidusC: fahrenheit(solidusF),
  liquidusC: fahrenheit(liquidusF),
  cadmium: /\bCd|\d+Cd/.test(composition),
  selfFluxingOnCopper: name.startsWith('BCuP'),
});

export const fillers: readonly Filler[] = [
  filler('BCuP-2', '93Cu 7P', 1310, 1460),
  filler('BCuP-3', '5Ag 89Cu 6P', 1190, 1485),
  filler('BCuP-4', '6Ag 87Cu 7P', 1190, 1335),
  filler('BCuP-5', '15Ag 80Cu 5P', 1190, 1475),
  filler('BAg-5', '45Ag 30Cu 25Zn', 1250, 1370),
  filler('BAg-7', '56Ag 22Cu 17Zn 5Sn', 1145, 1205),
  filler('BAg-24', '50Ag 20Cu 28Zn 2Ni', 1220, 1305),
  filler('BAg-1', '45Ag 15Cu 16Zn 24Cd', 1125, 1145),
];
