//! The equations at fixed nf: `dE/d ln a = - (sum_k a^k P_k)/(sum_k beta_k a^k) E`, nothing expanded.
//!
//! What evolves alone: the singlet pair (gluon, quark singlet) and three kinds of non-singlet. Each carries one more
//! row, what has flowed below `x_min`: momentum for the singlet pair, number for the non-singlets.

use crate::convolution::{Convolved, Derived, KernelSet};
use crate::kernels::splitting::Channel;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use std::sync::Arc;

/// Combinations of densities that evolve alone.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Sector {
    /// Gluon and the sum of all quarks and antiquarks.
    Singlet,
    /// Differences of `q + qbar`.
    NsPlus,
    /// Differences of `q - qbar`.
    NsMinus,
    /// The sum of all `q - qbar`.
    Valence,
}

/// A splitting function of a further order, or a correction to a known one, brought by the user.
#[derive(Debug, Clone)]
pub struct FurtherKernel {
    /// It multiplies `a^(order+1)`.
    pub order: usize,
    /// The number of flavours it holds for.
    pub nf: usize,
    /// What goes into what.
    pub channel: Channel,
    /// Its matrix.
    pub kernel: Convolved,
}

/// The equations of one nf.
pub struct FixedFlavour {
    beta: Vec<f64>,
    /// For the singlet, plus, minus and valence sectors one matrix a power of a.
    terms: Arc<Derived>,
    offsets: Vec<usize>,
    minus_is_plus: bool,
    valence_is_minus: bool,
}

impl FixedFlavour {
    /// The equations of a theory for nf flavours; `offsets` are those of the grid's panels.
    pub fn new(theory: &Theory, kernels: &KernelSet, further: &[FurtherKernel], nf: usize, offsets: &[usize]) -> Self {
        let beta = theory.beta(nf);
        let log = theory.evolution_mu2_ratio().ln();
        let make = || terms(theory.order(), kernels, further, nf, offsets, (&beta, log));
        // Without anything that only this theory has, the matrices serve others too.
        let terms = if further.is_empty() && log == 0.0 {
            kernels.derived((theory.order(), nf), make)
        } else {
            Arc::new(make())
        };
        let differs = |channels: [Channel; 2], from: usize| {
            (from..=theory.order()).any(|order| channels.iter().any(|c| !kernels.splitting_is_zero(order, *c)))
                || further.iter().any(|own| channels.contains(&own.channel))
        };
        Self {
            terms,
            offsets: offsets.to_vec(),
            // At LO the kernels of q + qbar and q - qbar are the same.
            minus_is_plus: !differs([Channel::NsPlus, Channel::NsMinus], 1),
            valence_is_minus: !differs([Channel::NsSea, Channel::NsSea], 0),
            beta,
        }
    }

    /// The sector whose equations are the same, so that nothing is computed twice.
    pub fn representative(&self, sector: Sector) -> Sector {
        match sector {
            Sector::Valence if self.valence_is_minus => self.representative(Sector::NsMinus),
            Sector::NsMinus if self.minus_is_plus => Sector::NsPlus,
            other => other,
        }
    }

    /// `A(s)` at `s = ln a`.
    pub fn generator(&self, sector: Sector, s: f64) -> Matrix {
        let a = s.exp();
        let beta = self.beta.iter().rev().fold(0.0, |sum, beta| sum * a + beta);
        let terms = match sector {
            Sector::Singlet => &self.terms[0],
            Sector::NsPlus => &self.terms[1],
            Sector::NsMinus => &self.terms[2],
            Sector::Valence => &self.terms[3],
        };
        let mut sum = Matrix::zeros(terms[0].rows(), terms[0].cols());
        let panels = self.panels(sector);
        for rows in panels.windows(2) {
            for i in rows[0]..rows[1] {
                // Nothing lies beyond the own panel.
                let target = &mut sum.row_mut(i)[..rows[1]];
                let mut factor = -1.0 / beta;
                for term in terms {
                    target.iter_mut().zip(term.row(i)).for_each(|(value, add)| *value += factor * add);
                    factor *= a;
                }
            }
        }
        sum
    }

    /// `d ln a/d ln mu^2` at `s = ln a`.
    pub fn slope(&self, s: f64) -> f64 {
        let a = s.exp();
        -a * self.beta.iter().rev().fold(0.0, |sum, beta| sum * a + beta)
    }

    /// Panels of the rows of a sector; the last one is the row of what lies below `x_min`.
    pub fn panels(&self, sector: Sector) -> Vec<usize> {
        let components = if sector == Sector::Singlet { 2 } else { 1 };
        let mut panels: Vec<usize> = self.offsets.iter().map(|offset| components * offset).collect();
        panels.push(panels[panels.len() - 1] + 1);
        panels
    }
}

/// The matrices of one nf: a list for each of singlet, plus, minus and valence, in it one a power of a; `running` holds
/// the beta function and the logarithm of the ratio of scales.
fn terms(
    order: usize,
    kernels: &KernelSet,
    further: &[FurtherKernel],
    nf: usize,
    offsets: &[usize],
    running: (&[f64], f64),
) -> Derived {
    let orders = further.iter().map(|kernel| kernel.order).fold(order, usize::max) + 1;
    let channel = |channel: Channel| {
        let known = |power: usize| {
            if power <= order {
                kernels.splitting(power, channel, nf as f64)
            } else {
                Convolved::zeros(offsets[offsets.len() - 1])
            }
        };
        let mut terms: Vec<Convolved> = (0..orders).map(known).collect();
        for own in further.iter().filter(|own| own.nf == nf && own.channel == channel) {
            terms[own.order].add_scaled(1.0, &own.kernel);
        }
        at_renormalisation_scale(&mut terms, running.0, running.1);
        terms
    };
    let [plus, minus, sea, pure, qg, gq, gg] = Channel::ALL.map(channel);
    let sum = |a: &[Convolved], b: &[Convolved]| -> Vec<Convolved> {
        let mut sum = a.to_vec();
        sum.iter_mut().zip(b).for_each(|(to, from)| to.add_scaled(1.0, from));
        sum
    };
    let (quark, valence) = (sum(&plus, &pure), sum(&minus, &sea));
    let singlet = (0..orders).map(|k| pair(&gg[k], &gq[k], &qg[k], &quark[k], offsets)).collect();
    // The last row is the number below `x_min`.
    let one = |terms: &[Convolved]| terms.iter().map(|term| term.matrix.with_last_row(&term.number_below)).collect();
    vec![singlet, one(&plus), one(&minus), one(&valence)]
}

/// Re-expands `sum_k a(mu_f^2)^(k+1) P_k` in `a(mu_r^2)`, to the orders at hand; `log = ln(mu_r^2/mu_f^2)`.
///
/// `a(mu_f^2)` is the Taylor series of the renormalisation-group equation: with `D = - sum_k beta_k a^(k+2) d/da`,
/// `a(mu_f^2)^n = sum_j (-log)^j/j! D^j a^n`; for NNLO it gives `P_1 + beta_0 log P_0` and
/// `P_2 + 2 beta_0 log P_1 + (beta_0^2 log^2 + beta_1 log) P_0` (as in S. Moch, J. Vermaseren, A. Vogt,
/// hep-ph/0403192, eq. 2.9).
fn at_renormalisation_scale(terms: &mut [Convolved], beta: &[f64], log: f64) {
    if log == 0.0 {
        return;
    }
    let orders = terms.len();
    let given = terms.to_vec();
    for (k, term) in given.iter().enumerate() {
        // Coefficients of a^(k+1), a^(k+2), ... in the re-expanded a^(k+1), added to the orders above.
        let mut derivative = vec![0.0; orders];
        derivative[k] = 1.0;
        let mut factor = 1.0;
        for j in 1..orders - k {
            let mut next = vec![0.0; orders];
            for (power, value) in derivative.iter().enumerate() {
                for (l, beta) in beta.iter().enumerate().take_while(|(l, _)| power + l + 1 < orders) {
                    next[power + l + 1] -= beta * (power + 1) as f64 * value;
                }
            }
            derivative = next;
            factor *= -log / j as f64;
            for (order, value) in derivative.iter().enumerate() {
                if *value != 0.0 {
                    terms[order].add_scaled(factor * value, term);
                }
            }
        }
    }
}

/// The singlet pair, panel by panel (gluon nodes, then quark nodes of each), and the row of momentum below `x_min`.
fn pair(gg: &Convolved, gq: &Convolved, qg: &Convolved, qq: &Convolved, offsets: &[usize]) -> Matrix {
    let n = offsets[offsets.len() - 1];
    let mut all = Matrix::zeros(2 * n + 1, 2 * n + 1);
    for (component, sources) in [[gg, gq], [qg, qq]].iter().enumerate() {
        for i in 0..n {
            let row = all.row_mut(place(offsets, component, i));
            for (source, kernel) in sources.iter().enumerate() {
                scatter(row, &kernel.matrix.row(i)[..n], source, offsets);
            }
        }
    }
    let row = all.row_mut(2 * n);
    for (source, kernels) in [[gg, qg], [gq, qq]].iter().enumerate() {
        let below: Vec<f64> =
            kernels[0].momentum_below.iter().zip(&kernels[1].momentum_below).map(|(a, b)| a + b).collect();
        scatter(row, &below, source, offsets);
    }
    all
}

/// Where node `i` of a component of the singlet pair stands.
pub fn place(offsets: &[usize], component: usize, i: usize) -> usize {
    let panel = offsets.partition_point(|&offset| offset <= i) - 1;
    let (start, end) = (offsets[panel], offsets[panel + 1]);
    start + i + component * (end - start)
}

fn scatter(row: &mut [f64], values: &[f64], component: usize, offsets: &[usize]) {
    for (i, value) in values.iter().enumerate() {
        row[place(offsets, component, i)] = *value;
    }
}
