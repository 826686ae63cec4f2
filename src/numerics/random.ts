/**
 * Seeded random numbers: xoshiro128** of Blackman & Vigna 2021, "Scrambled linear pseudorandom number
 * generators", ACM Transactions on Mathematical Software 47(4). Its state of four words is filled by hashing,
 * so near seeds give unlike streams.
 */
export interface Random {
  /** Uniform in [0, 1), in steps of 2^-32. */
  readonly next: () => number;
  /** Standard normal. */
  readonly normal: () => number;
  /**
   * A stream of its own, fixed by this stream's seed and the label alone: drawing more numbers here never
   * shifts the numbers of a fork.
   */
  readonly fork: (label: string) => Random;
}

type Words = readonly [number, number, number, number];

const rotateLeft = (x: number, k: number): number => (x << k) | (x >>> (32 - k));

/** The bare generator: successive 32-bit outputs of xoshiro128** from a state that must not be all zero. */
export function xoshiro128StarStar(state: Words): () => number {
  let [s0, s1, s2, s3] = state;
  return () => {
    const result = Math.imul(rotateLeft(Math.imul(s1, 5), 7), 9) >>> 0;
    const t = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= t;
    s3 = rotateLeft(s3, 11);
    return result;
  };
}

/**
 * The 32-bit finaliser of MurmurHash3 (A. Appleby, public domain): every input bit flips half of the output
 * bits.
 */
function avalanche(word: number): number {
  let h = word;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}

/** FNV-1a (Fowler, Noll & Vo) over the label's UTF-16 units, started from a mixed word. */
function hashLabel(label: string, start: number): number {
  let h = avalanche(start ^ 0x811c9dc5);
  for (let i = 0; i < label.length; i++) h = Math.imul(h ^ label.charCodeAt(i), 0x01000193);
  return avalanche(h);
}

const LANES = [0x9e3779b9, 0x3c6ef372, 0xdaa66d2b, 0x78dde6e4] as const;

function seedWords(label: string, root: Words): Words {
  const [a, b, c, d] = LANES.map((lane, i) => hashLabel(label, (root[i] ^ lane) >>> 0));
  return [a, b, c, (d | 1) >>> 0];
}

/**
 * Marsaglia & Bray 1964, polar method: two normals from one accepted pair, the second kept for the next call.
 */
function polarNormal(next: () => number): () => number {
  let spare: number | null = null;
  return () => {
    if (spare !== null) {
      const kept = spare;
      spare = null;
      return kept;
    }
    for (;;) {
      const u = 2 * next() - 1;
      const v = 2 * next() - 1;
      const s = u * u + v * v;
      if (s > 0 && s < 1) {
        const scale = Math.sqrt((-2 * Math.log(s)) / s);
        spare = v * scale;
        return u * scale;
      }
    }
  };
}

function stream(root: Words): Random {
  const draw = xoshiro128StarStar(root);
  const next = (): number => draw() / 0x1_0000_0000;
  return { next, normal: polarNormal(next), fork: (label) => stream(seedWords(label, root)) };
}

/** A stream fixed by its seed, any finite number. Throws `RangeError` on NaN or infinity. */
export function createRandom(seed: number): Random {
  if (!Number.isFinite(seed)) throw new RangeError(`Expected a finite seed, found ${seed}.`);
  return stream(seedWords(String(seed), [0, 0, 0, 0]));
}
