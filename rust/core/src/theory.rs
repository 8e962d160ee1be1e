//! What a build is told: order, coupling, masses, numbers of flavours, scale ratios. Validated when made.
//!
//! Order k of the theory keeps `a^(k+1)` in `df/d ln mu^2`: LO 0, NLO 1, NNLO 2. The number of flavours of a point is
//! decided by its factorisation scale alone; the coupling changes flavours at `mu_r^2 = (mu_r^2/mu_f^2) mu_thr^2`.

use std::f64::consts::PI;

use crate::coupling::beta::{MOST_LOOPS, beta};
use crate::coupling::masses::{MassKind, Masses};
use crate::coupling::running::ALPHA_S_LIMIT;
use crate::coupling::sensitivity::Parameter;
use crate::coupling::{FEWEST, MOST, Reference, RunningCoupling, Step};
use crate::error::{Result, require};

/// Scales equal to a threshold up to this relative difference count as equal: `m = sqrt(2)` squared in floating
/// point is above 2 by two units of rounding, and a scale of 2 is then meant to lie on the threshold.
pub(crate) const SAME_SCALE: f64 = 4.0 * f64::EPSILON;

/// Everything assumed, as given.
#[derive(Debug, Clone, PartialEq)]
pub struct Assumptions {
    /// 0 LO, 1 NLO, 2 NNLO.
    pub order: usize,
    /// Coupling at `alpha_s_q2`, above 0, at most 5.
    pub alpha_s: f64,
    /// Renormalisation scale `mu_r^2` of `alpha_s`, GeV^2.
    pub alpha_s_q2: f64,
    /// Number of flavours of `alpha_s`, 3 to 6; it need not lie within `fewest..=most`.
    pub alpha_s_nf: usize,
    /// Heavy-quark masses.
    pub masses: Masses,
    /// Scales `mu_thr^2` (of `mu_f^2`) where charm, bottom, top become active, GeV^2.
    pub thresholds_q2: [f64; 3],
    /// Fewest flavours of the densities, at least 3.
    pub fewest: usize,
    /// Most flavours of the densities, at most 6.
    pub most: usize,
    /// `mu_r^2/mu_f^2` in the splitting functions, 1/4 to 4.
    pub evolution_mu2_ratio: f64,
    /// Loops of the running coupling, 1 to 5.
    pub running_loops: usize,
    /// Whether the compact parametrisation of `A_Hg^(2)` replaces the exact one.
    pub compact_heavy_gluon: bool,
}

/// Assumptions that have been checked, with the coupling that follows from them.
#[derive(Debug, Clone, PartialEq)]
pub struct Theory {
    given: Assumptions,
    coupling: RunningCoupling,
}

impl Theory {
    /// Checks the assumptions and follows the coupling through the thresholds.
    ///
    /// # Errors
    /// [`Error::Argument`] for what is not allowed. A Landau pole between the coupling's reference and a scale
    /// shows only when a coupling beyond it is asked for.
    ///
    /// [`Error::Argument`]: crate::error::Error::Argument
    pub fn new(given: Assumptions) -> Result<Self> {
        check_numbers(&given)?;
        check_scales(&given)?;
        let masses = given.masses.values();
        let step = |i: usize| Step {
            q2: given.evolution_mu2_ratio * given.thresholds_q2[i],
            mass2: masses[i] * masses[i],
            kind: given.masses.kind,
        };
        let reference = Reference { a: given.alpha_s / (4.0 * PI), q2: given.alpha_s_q2, nf: given.alpha_s_nf };
        let steps = [step(0), step(1), step(2)];
        let coupling = RunningCoupling::new(reference, steps, given.running_loops);
        Ok(Self { given, coupling })
    }

    /// Everything assumed, as given.
    pub fn assumptions(&self) -> &Assumptions {
        &self.given
    }

    /// 0 LO, 1 NLO, 2 NNLO.
    pub fn order(&self) -> usize {
        self.given.order
    }

    /// Fewest flavours of the densities.
    pub fn fewest(&self) -> usize {
        self.given.fewest
    }

    /// Most flavours of the densities.
    pub fn most(&self) -> usize {
        self.given.most
    }

    /// `mu_r^2/mu_f^2` in the splitting functions.
    pub fn evolution_mu2_ratio(&self) -> f64 {
        self.given.evolution_mu2_ratio
    }

    /// Loops of the running coupling.
    pub fn running_loops(&self) -> usize {
        self.given.running_loops
    }

    /// Pole or MS-bar masses.
    pub fn mass_kind(&self) -> MassKind {
        self.given.masses.kind
    }

    /// Whether the compact parametrisation of `A_Hg^(2)` is used.
    pub fn compact_heavy_gluon(&self) -> bool {
        self.given.compact_heavy_gluon
    }

    /// Number of flavours at the factorisation scale `mu_f2` (GeV^2), within `fewest..=most`.
    ///
    /// A scale equal to a threshold, to four units of rounding, counts as above it.
    pub fn nf_at(&self, mu_f2: f64) -> usize {
        (self.given.fewest + 1..=self.given.most)
            .take_while(|nf| mu_f2 >= self.threshold_q2(*nf) * (1.0 - SAME_SCALE))
            .last()
            .unwrap_or(self.given.fewest)
    }

    /// Factorisation scale `mu_f^2` in GeV^2 at which nf - 1 flavours become nf; nf from 4 to 6, a number
    /// outside is taken as the nearest of them.
    pub fn threshold_q2(&self, nf: usize) -> f64 {
        self.given.thresholds_q2[heavy(nf)]
    }

    /// Squared mass in GeV^2 of the quark that becomes active with the nf-th flavour; nf as in
    /// [`Theory::threshold_q2`].
    pub fn mass2(&self, nf: usize) -> f64 {
        self.given.masses.values()[heavy(nf)].powi(2)
    }

    /// `beta_0 ..`, as many as the coupling runs with: `da/d ln mu^2 = - sum_k beta_k a^(k+2)`.
    pub fn beta(&self, nf: usize) -> Vec<f64> {
        beta(nf, self.given.running_loops)
    }

    /// `a^(nf)(mu_r^2)`, `a = alpha_s/(4 pi)`, scale in GeV^2, nf from 3 to 6.
    ///
    /// # Errors
    /// [`Error::Argument`] for a scale or nf that is not allowed, or a coupling too large for the step at a
    /// threshold; [`Error::LandauPole`] on the way from the reference.
    ///
    /// [`Error::Argument`]: crate::error::Error::Argument
    /// [`Error::LandauPole`]: crate::error::Error::LandauPole
    pub fn a(&self, mu_r2: f64, nf: usize) -> Result<f64> {
        positive("q2", mu_r2, "GeV^2")?;
        flavours("nf", nf)?;
        self.coupling.a(mu_r2, nf)
    }

    /// `a^(nf)(mu_r^2)` at the renormalisation scale that belongs to the factorisation scale `mu_f2` (GeV^2).
    ///
    /// # Errors
    /// As [`Theory::a`].
    pub fn a_at_factorisation(&self, mu_f2: f64, nf: usize) -> Result<f64> {
        self.a(self.given.evolution_mu2_ratio * mu_f2, nf)
    }

    /// `alpha_s^(nf)(mu_r^2)`.
    ///
    /// # Errors
    /// As [`Theory::a`].
    pub fn alpha_s(&self, mu_r2: f64, nf: usize) -> Result<f64> {
        Ok(4.0 * PI * self.a(mu_r2, nf)?)
    }

    /// `d alpha_s^(nf)(mu_r^2)/dp`, threshold scales held fixed.
    ///
    /// # Errors
    /// As [`Theory::a`].
    pub fn alpha_s_derivative(&self, parameter: Parameter, mu_r2: f64, nf: usize) -> Result<f64> {
        positive("q2", mu_r2, "GeV^2")?;
        flavours("nf", nf)?;
        Ok(4.0 * PI * self.coupling.derivative(parameter, mu_r2, nf)?)
    }

    /// `d alpha_s^(nf)/d ln mu_r^2` at `mu_r2`.
    ///
    /// # Errors
    /// As [`Theory::a`].
    pub fn alpha_s_slope(&self, mu_r2: f64, nf: usize) -> Result<f64> {
        positive("q2", mu_r2, "GeV^2")?;
        flavours("nf", nf)?;
        Ok(4.0 * PI * self.coupling.running_slope(mu_r2, nf)?)
    }

    /// What `beta(a)` is multiplied with to give `da^(nf)/dp` at any scale, threshold scales held fixed.
    ///
    /// # Errors
    /// Those of [`Theory::a`] on the way from the reference.
    pub fn shift(&self, parameter: Parameter, nf: usize) -> Result<f64> {
        flavours("nf", nf)?;
        self.coupling.shift(parameter, nf)
    }

    /// Factorisation scale `mu_f^2` (GeV^2) where [`Theory::a_at_factorisation`] is `a`.
    ///
    /// # Errors
    /// As [`Theory::a`]; [`Error::Argument`] for `a` not above 0 or beyond the largest coupling followed.
    ///
    /// [`Error::Argument`]: crate::error::Error::Argument
    pub fn factorisation_scale(&self, a: f64, nf: usize) -> Result<f64> {
        flavours("nf", nf)?;
        coupling_value("a", a, ALPHA_S_LIMIT / (4.0 * PI))?;
        Ok(self.coupling.scale(a, nf)? / self.given.evolution_mu2_ratio)
    }
}

/// Place of the quark that makes the nf-th flavour among charm, bottom, top.
fn heavy(nf: usize) -> usize {
    nf.clamp(FEWEST + 1, MOST) - FEWEST - 1
}

fn check_numbers(given: &Assumptions) -> Result<()> {
    require("order", &given.order, given.order <= 2, "it must be 0 (LO), 1 (NLO) or 2 (NNLO)")?;
    let loops = given.running_loops;
    require("running_loops", &loops, (1..=MOST_LOOPS).contains(&loops), "it must be 1 to 5")?;
    flavours("fewest flavours", given.fewest)?;
    flavours("most flavours", given.most)?;
    require(
        "flavours",
        &format!("({}, {})", given.fewest, given.most),
        given.fewest <= given.most,
        "the fewest must not exceed the most",
    )?;
    flavours("nf of the coupling", given.alpha_s_nf)?;
    coupling_value("alpha_s", given.alpha_s, ALPHA_S_LIMIT)?;
    let ratio = given.evolution_mu2_ratio;
    require("evolution_mu2_ratio", &ratio, (0.25..=4.0).contains(&ratio), "mu_r^2/mu_f^2 must lie in [0.25, 4]")
}

fn check_scales(given: &Assumptions) -> Result<()> {
    positive("q2 of the coupling", given.alpha_s_q2, "GeV^2")?;
    let masses = given.masses.values();
    for (name, mass) in ["charm mass", "bottom mass", "top mass"].into_iter().zip(masses) {
        positive(name, mass, "GeV")?;
    }
    require(
        "masses",
        &format!("{masses:?}"),
        masses[0] < masses[1] && masses[1] < masses[2],
        "charm, bottom and top must increase in this order",
    )?;
    let thresholds = given.thresholds_q2;
    for (name, q2) in ["charm threshold", "bottom threshold", "top threshold"].into_iter().zip(thresholds) {
        positive(name, q2, "GeV^2")?;
    }
    // The order matters only for the thresholds that densities cross.
    let crossed = &thresholds[given.fewest - FEWEST..given.most - FEWEST];
    require(
        "thresholds_q2",
        &format!("{thresholds:?}"),
        crossed.windows(2).all(|pair| pair[0] < pair[1]),
        "charm, bottom and top must increase in this order",
    )
}

fn positive(name: &'static str, value: f64, unit: &str) -> Result<()> {
    let holds = value.is_finite() && value > 0.0;
    require(name, &value, holds, &format!("it must be finite and above 0 {unit}"))
}

fn flavours(name: &'static str, nf: usize) -> Result<()> {
    require(name, &nf, (FEWEST..=MOST).contains(&nf), "it must be 3, 4, 5 or 6")
}

fn coupling_value(name: &'static str, value: f64, most: f64) -> Result<()> {
    let holds = value > 0.0 && value <= most;
    require(name, &value, holds, &format!("it must be above 0 and at most {}", (1e4 * most).floor() / 1e4))
}
