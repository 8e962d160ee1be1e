//! Theories and comparisons shared by the tests.

use scalewright_core::coupling::masses::{MassKind, Masses};
use scalewright_core::theory::Assumptions;

/// Both kinds of masses.
pub const KINDS: [MassKind; 2] = [MassKind::Pole, MassKind::Msbar];

/// Asserts a relative difference of at most `relative`.
pub fn close(given: f64, expected: f64, relative: f64) {
    let difference = (given / expected - 1.0).abs();
    assert!(difference <= relative, "{given} instead of {expected}: {difference:.1e}");
}

/// The setting of the published benchmark of parton evolution (W. Giele et al., hep-ph/0204316, section 1.3).
pub fn benchmark(order: usize, fewest: usize, most: usize, nf: usize) -> Assumptions {
    let masses = Masses { charm: 2f64.sqrt(), bottom: 4.5, top: 175.0, kind: MassKind::Pole };
    Assumptions {
        order,
        alpha_s: 0.35,
        alpha_s_q2: 2.0,
        alpha_s_nf: nf,
        masses,
        thresholds_q2: masses.values().map(|m| m * m),
        fewest,
        most,
        evolution_mu2_ratio: 1.0,
        running_loops: order + 1,
        compact_heavy_gluon: true,
    }
}

/// Masses near those of the PDG review, coupling given at the Z with five flavours.
pub fn at_the_z(loops: usize, kind: MassKind) -> Assumptions {
    let masses = Masses { charm: 1.3, bottom: 4.2, top: 163.0, kind };
    Assumptions {
        alpha_s: 0.118,
        alpha_s_q2: 91.1876 * 91.1876,
        alpha_s_nf: 5,
        masses,
        thresholds_q2: masses.values().map(|m| m * m),
        running_loops: loops,
        ..benchmark(2, 3, 6, 5)
    }
}
