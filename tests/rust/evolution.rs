//! Evolution at fixed nf, against closed forms: power laws of Mellin moments, kernels of the user.

mod builds;
#[expect(dead_code, reason = "other tests use the rest")]
mod settings;

use builds::{acting, block, built, coarse, density, difference, dot, options, theory};
use scalewright_core::convolution::{Convolved, kernels_on};
use scalewright_core::evolution::FurtherKernel;
use scalewright_core::grid::{Grid, Resolution};
use scalewright_core::kernels::splitting::Channel;
use scalewright_core::theory::{Assumptions, Theory};
use scalewright_core::thresholds::Evolution;
use scalewright_core::watch::Unwatched;
use settings::{benchmark, close};

const NF: f64 = 4.0;
const START: (f64, usize) = (2.0, 4);
const END: (f64, usize) = (1e4, 4);
const CF: f64 = 4.0 / 3.0;

/// Four flavours throughout.
fn fixed(order: usize) -> Assumptions {
    benchmark(order, 4, 4, 4)
}

fn beta0() -> f64 {
    11.0 - 2.0 / 3.0 * NF
}

/// `ln(a/a0)` of the whole evolution.
fn log_ratio(theory: &Theory) -> f64 {
    (theory.a_at_factorisation(END.0, 4).unwrap() / theory.a_at_factorisation(START.0, 4).unwrap()).ln()
}

/// LO moments, `int dz z^(n-1) P(z)`: quark-quark, quark-gluon, gluon-quark, gluon-gluon (D. Gross, F. Wilczek,
/// Phys. Rev. D 9 (1974) 980; H. Georgi, H. Politzer, Phys. Rev. D 9 (1974) 416), for `a = alpha_s/(4 pi)`.
fn lo_moments(n: i32) -> [[f64; 2]; 2] {
    let sum: f64 = (1..=n).map(|k| 1.0 / f64::from(k)).sum();
    let n = f64::from(n);
    let common = n * n + n + 2.0;
    let quark = CF * (3.0 + 2.0 / (n * (n + 1.0)) - 4.0 * sum);
    let from_gluon = 2.0 * NF * common / (n * (n + 1.0) * (n + 2.0));
    let to_gluon = 2.0 * CF * common / ((n - 1.0) * n * (n + 1.0));
    let gluon = 12.0 * (1.0 / (n * (n - 1.0)) + 1.0 / ((n + 1.0) * (n + 2.0)) - sum) + beta0();
    [[quark, from_gluon], [to_gluon, gluon]]
}

fn fine_build() -> (Theory, Grid, Evolution) {
    let (theory, grid) = (theory(fixed(0)), Grid::preset(1e-4, Resolution::Fine).unwrap());
    let set = built(&theory, &grid, &options(START, &[END])).unwrap();
    (theory, grid, set)
}

/// `F_n(a) = F_n(a0) (a/a0)^(gamma/beta0)`, gamma = -P. What moves below `x_min` has no part in moments from the fourth
/// on: `x_min^3`, 1e-12. The steps reach 1e-8.
#[test]
fn non_singlet_moments_follow_their_power_law() {
    let (theory, grid, set) = fine_build();
    assert!(!set.names().iter().any(|name| name == "ns-"), "one non-singlet kernel at LO: {:?}", set.names());
    let start = density(&grid, 0.6, 3);
    let end = acting(&block(&set, &grid, "ns+", END), &start);
    for n in [4, 5, 6, 8, 10] {
        let weights = grid.moment_weights(f64::from(n - 1));
        let power = -lo_moments(n)[0][0] / beta0();
        let expected = (power * log_ratio(&theory)).exp();
        let given = dot(&weights, &end) / dot(&weights, &start);
        println!("n = {n}: {given:.10} {:.1e}", given / expected - 1.0);
        close(given, expected, 1e-8);
    }
}

/// The same for quark singlet and gluon, `exp(-ln(a/a0) P/beta0)` of a 2 x 2 matrix by its eigenvalues. Below
/// `x_min` lies `F(x_min) x_min^(n-1)/(n-1)`: with a gluon of 50 there and a fourth moment of 1e-3, 2e-8 of it; the fifth
/// is the first to be free of this.
#[test]
fn singlet_moments_follow_their_power_law() {
    let (theory, grid, set) = fine_build();
    let (quark, gluon) = (density(&grid, -0.1, 5), density(&grid, -0.2, 6));
    let part = |name: &str, f: &[f64]| acting(&block(&set, &grid, name, END), f);
    let sum = |a: Vec<f64>, b: Vec<f64>| -> Vec<f64> { a.iter().zip(&b).map(|(a, b)| a + b).collect() };
    let quark_end = sum(part("light+<-light+", &quark), part("light+<-gluon", &gluon));
    let gluon_end = sum(part("gluon<-light+", &quark), part("gluon<-gluon", &gluon));
    for n in [5, 6, 8, 10] {
        let weights = grid.moment_weights(f64::from(n - 1));
        let [[qq, qg], [gq, gg]] = lo_moments(n);
        let (middle, half) = (0.5 * (qq + gg), (0.25 * (qq - gg).powi(2) + qg * gq).sqrt());
        let t = -log_ratio(&theory) / beta0();
        let growth = (middle * t).exp();
        // exp(tP) = e^(middle t) (cosh(half t) + (P - middle) sinh(half t)/half)
        let (even, odd) = (growth * (half * t).cosh(), growth * (half * t).sinh() / half);
        let (q, g) = (dot(&weights, &quark), dot(&weights, &gluon));
        let expected_quark = even * q + odd * ((qq - middle) * q + qg * g);
        let expected_gluon = even * g + odd * (gq * q + (gg - middle) * g);
        println!("n = {n}: {:.1e}", dot(&weights, &quark_end) / expected_quark - 1.0);
        close(dot(&weights, &quark_end), expected_quark, 1e-8);
        close(dot(&weights, &gluon_end), expected_gluon, 1e-8);
    }
}

/// Valence number, above and below `x_min`, is kept to what the interpolation of `x^0.6 (1-x)^3` leaves.
#[test]
fn number_above_and_below_x_min_is_kept() {
    let (_, grid, set) = fine_build();
    let start = density(&grid, 0.6, 3);
    let end = acting(&block(&set, &grid, "ns+", END), &start);
    let (_, flows) = set.values(&[END], &Unwatched).unwrap();
    let index = set.flow_names().iter().position(|name| name == "number:ns+").unwrap();
    let below = dot(&flows[index * grid.nodes()..(index + 1) * grid.nodes()], &start);
    let weights = grid.moment_weights(0.0);
    assert!(below > 1e-4, "something flows: {below}");
    close(dot(&weights, &end) + below, dot(&weights, &start), 1e-9);
}

/// Orders at which the equations begin to differ: q + qbar from q - qbar at NLO, the valence at NNLO.
#[test]
fn nothing_is_computed_twice() {
    for (order, expected) in [(0, &[][..]), (1, &["ns-"]), (2, &["ns-", "light-<-light-"])] {
        let set = built(&theory(fixed(order)), &coarse(), &options(START, &[END])).unwrap();
        let names = ["gluon<-gluon", "gluon<-light+", "light+<-gluon", "light+<-light+", "ns+"];
        let all: Vec<&str> = names.into_iter().chain(expected.iter().copied()).collect();
        assert_eq!(set.names(), all, "order {order}");
    }
}

/// A kernel of the user for four flavours.
fn own(order: usize, channel: Channel, kernel: Convolved) -> FurtherKernel {
    FurtherKernel { order, nf: 4, channel, kernel }
}

fn with(theory: &Theory, grid: &Grid, further: Vec<FurtherKernel>) -> Evolution {
    let mut options = options(START, &[END]);
    options.further = further;
    built(theory, grid, &options).unwrap()
}

/// Adding zeros changes no bit, at an order that is known or beyond.
#[test]
fn a_kernel_of_zero_changes_nothing() {
    let (theory, grid) = (theory(fixed(2)), coarse());
    let plain = with(&theory, &grid, vec![]);
    for order in [1, 3] {
        let zeros = Channel::ALL.map(|channel| own(order, channel, Convolved::zeros(grid.nodes())));
        let more = with(&theory, &grid, zeros.into());
        for name in plain.names() {
            assert_eq!(block(&more, &grid, name, END), block(&plain, &grid, name, END), "{name} order {order}");
        }
    }
}

/// NLO kernels taken off leave LO kernels with two-loop running.
#[test]
fn minus_a_known_kernel_takes_it_off() {
    let grid = coarse();
    let kernels = kernels_on(&grid, &Unwatched).unwrap();
    let minus = |channel: Channel| {
        let mut kernel = Convolved::zeros(grid.nodes());
        kernel.add_scaled(-1.0, &kernels.splitting(1, channel, NF));
        own(1, channel, kernel)
    };
    let nlo = theory(fixed(1));
    let taken_off = with(&nlo, &grid, Channel::ALL.map(minus).into());
    let lo = with(&theory(Assumptions { running_loops: 2, ..fixed(0) }), &grid, vec![]);
    let whole = with(&nlo, &grid, vec![]);
    for name in lo.names() {
        let expected = block(&lo, &grid, name, END);
        // P - P is zero exactly.
        assert_eq!(block(&taken_off, &grid, name, END), expected, "{name}");
        assert!(difference(&block(&whole, &grid, name, END), &expected) > 1e-3, "{name}: NLO does something");
    }
}

/// `c delta(1-z)` at order k multiplies by `exp(-int da c a^(k-1)/beta0)` with one loop; nothing where another nf is
/// named. The steps reach 1e-8.
#[test]
fn a_local_kernel_multiplies_by_its_closed_form() {
    let (theory, grid) = (theory(fixed(0)), coarse());
    let [a0, a] = [START, END].map(|(q2, nf)| theory.a_at_factorisation(q2, nf).unwrap());
    let plain = block(&with(&theory, &grid, vec![]), &grid, "ns+", END);
    for (order, c) in [(0, 2.5), (1, -40.0), (3, 2e4)] {
        let mut kernel = Convolved::zeros(grid.nodes());
        kernel.add_scaled(c, &Convolved::identity(grid.nodes()));
        let exponent = match order {
            0 => (a / a0).ln(),
            k => (a.powi(k) - a0.powi(k)) / f64::from(k),
        };
        let factor = (-c / beta0() * exponent).exp();
        let set = with(&theory, &grid, vec![own(order as usize, Channel::NsPlus, kernel.clone())]);
        let expected: Vec<f64> = plain.iter().map(|value| factor * value).collect();
        let given = difference(&block(&set, &grid, "ns+", END), &expected);
        println!("order {order}: factor {factor}, {given:.1e}");
        assert!(given < 1e-8 * factor.max(1.0), "order {order}: {given:.1e}");
        assert_eq!(block(&set, &grid, "ns-", END), plain, "q - qbar is left alone");
        let elsewhere = FurtherKernel { nf: 5, ..own(order as usize, Channel::NsPlus, kernel) };
        assert_eq!(block(&with(&theory, &grid, vec![elsewhere]), &grid, "ns+", END), plain, "nf = 5");
    }
}
