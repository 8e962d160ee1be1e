//! The beta function of QCD in the MS-bar scheme, through five loops.
//!
//! `da/d ln mu^2 = - sum_k beta_k a^(k+2)`, `a = alpha_s/(4 pi)`, SU(3).

/// zeta(3).
pub(super) const ZETA3: f64 = 1.202056903159594285;
/// zeta(4) = pi^4/90.
const ZETA4: f64 = 1.082323233711138192;
/// zeta(5).
const ZETA5: f64 = 1.036927755143369926;

/// Most loops known.
pub const MOST_LOOPS: usize = 5;

/// `beta_0 .. beta_(loops-1)` for `nf` flavours; `loops` beyond five gives five.
///
/// One to four loops: T. van Ritbergen, J. Vermaseren, S. Larin, hep-ph/9701390, eq. (8) for SU(3); five loops:
/// P. Baikov, K. Chetyrkin, J. Kuehn, 1606.08659, eq. (3), whose `beta_4` for `alpha_s/pi` is ours over 4^5.
pub fn beta(nf: usize, loops: usize) -> Vec<f64> {
    let n = nf as f64;
    COEFFICIENTS.iter().take(loops).map(|powers| powers.iter().rev().fold(0.0, |sum, c| sum * n + c)).collect()
}

/// Row k: `beta_k` by rising power of nf.
const COEFFICIENTS: [[f64; 5]; MOST_LOOPS] = [
    [11.0, -2.0 / 3.0, 0.0, 0.0, 0.0],
    [102.0, -38.0 / 3.0, 0.0, 0.0, 0.0],
    [2857.0 / 2.0, -5033.0 / 18.0, 325.0 / 54.0, 0.0, 0.0],
    [
        149753.0 / 6.0 + 3564.0 * ZETA3,
        -(1078361.0 / 162.0 + 6508.0 / 27.0 * ZETA3),
        50065.0 / 162.0 + 6472.0 / 81.0 * ZETA3,
        1093.0 / 729.0,
        0.0,
    ],
    [
        8157455.0 / 16.0 + 621885.0 / 2.0 * ZETA3 - 88209.0 / 2.0 * ZETA4 - 288090.0 * ZETA5,
        -336460813.0 / 1944.0 - 4811164.0 / 81.0 * ZETA3 + 33935.0 / 6.0 * ZETA4 + 1358995.0 / 27.0 * ZETA5,
        25960913.0 / 1944.0 + 698531.0 / 81.0 * ZETA3 - 10526.0 / 9.0 * ZETA4 - 381760.0 / 81.0 * ZETA5,
        -630559.0 / 5832.0 - 48722.0 / 243.0 * ZETA3 + 1618.0 / 27.0 * ZETA4 + 460.0 / 9.0 * ZETA5,
        1205.0 / 2916.0 - 152.0 / 81.0 * ZETA3,
    ],
];
