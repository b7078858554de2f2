/**
 * The toponymy of Ondravesh, a land that does not exist. Generic words stand first and mean the kind of thing
 * (`Ghelm` range, `Dul` plateau, `Isk` island, `Ruon` river); a settlement is a stem and an ending for where it
 * lies (`-mova` shore, `-dresk` valley, `-kaelu` upland, `-ondim` plain, `-ithra` island).
 */

export const LAND_NAME = 'Ondravesh';

export const RANGE_NAMES = { west: 'Ghelm Varomin', east: 'Ghelm Tulheva', north: 'Ghelm Oluspan' };
export const PLATEAU_NAME = 'Dul Meshara';
export const ISLAND_NAMES = { north: 'Isk Purovath', south: 'Isk Zelemu', east: 'Isk Ummorel' };

export const RIVER_NAMES = [
  'Ruon Tesmalu',
  'Ruon Ghevari',
  'Ruon Pashune',
  'Ruon Okterra',
  'Ruon Limuvesh',
  'Ruon Soraketh',
  'Ruon Uldromi',
  'Ruon Yavesta',
  'Ruon Brisketh',
  'Ruon Nemoluk',
  'Ruon Zhaturi',
  'Ruon Halvessu',
];

const STEMS = [
  'Abrush',
  'Belkuv',
  'Chuvrem',
  'Dremul',
  'Eshtam',
  'Fulgav',
  'Ghirom',
  'Hesklu',
  'Ivrond',
  'Jashul',
  'Kovrath',
  'Lumesh',
  'Mordiv',
  'Nashkor',
  'Olvrim',
  'Pethuv',
  'Queshl',
  'Rudmav',
  'Sheltuv',
  'Tarvush',
  'Ulmesk',
  'Vrodim',
  'Wushtel',
  'Xelvor',
  'Yurdash',
  'Zembuv',
  'Ashvrel',
  'Brumesk',
  'Drulvash',
  'Keshvun',
  'Mulgrev',
  'Tveshmor',
];

const ENDINGS = { shore: 'mova', valley: 'dresk', upland: 'kaelu', plain: 'ondim', island: 'ithra' };

/** Names settlements by where they lie; every name is given once. */
export function createNamer(random) {
  const taken = new Set();
  return (setting) => {
    const ending = ENDINGS[setting];
    for (;;) {
      const name = `${random.pick(STEMS)}${random.pick(['', 'a', 'e', 'u', 'i'])}${ending}`;
      if (!taken.has(name)) {
        taken.add(name);
        return name;
      }
    }
  };
}
