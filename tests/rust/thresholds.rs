//! Routes, crossings and finished sets: what is served, what is conserved, what is refused.

mod builds;
#[expect(dead_code, reason = "other tests use the rest")]
mod settings;

use std::sync::atomic::{AtomicUsize, Ordering};

use builds::{block, built, coarse, density, difference, dot, options, theory};
use scalewright_core::convolution::Convolved;
use scalewright_core::error::Error;
use scalewright_core::evolution::FurtherKernel;
use scalewright_core::grid::{Grid, Resolution};
use scalewright_core::kernels::splitting::Channel;
use scalewright_core::theory::Theory;
use scalewright_core::thresholds::{BuildOptions, Vectors, build, evolve};
use scalewright_core::watch::{Unwatched, Watch};
use settings::{benchmark, close};

/// A scale in GeV^2 and the number of flavours at it.
type Scale = (f64, usize);
/// What is served at one number of flavours, from the lowest to the highest scale.
type Range = (usize, f64, f64);

/// Charm and bottom thresholds of the benchmark, GeV^2: squares of sqrt(2) and 4.5.
const CHARM_Q2: f64 = 2.0;
const BOTTOM_Q2: f64 = 20.25;
const LIGHT: [i64; 7] = [-3, -2, -1, 21, 1, 2, 3];
const TO_CHARM: [i64; 9] = [-4, -3, -2, -1, 21, 1, 2, 3, 4];

fn variable(order: usize) -> Theory {
    theory(benchmark(order, 3, 6, 3))
}

/// Gluon and quarks of made-up shapes, one after the other as in [`LIGHT`].
fn input(grid: &Grid) -> Vec<f64> {
    let shapes =
        [(-0.1, 7, 0.2), (-0.1, 7, 0.3), (-0.1, 6, 0.4), (-0.2, 5, 2.0), (0.7, 4, 2.0), (0.7, 3, 4.0), (-0.1, 8, 0.2)];
    shapes.iter().flat_map(|&(a, b, norm)| density(grid, a, b).into_iter().map(move |f| norm * f)).collect()
}

fn carried(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    (in_flavours, values): (&[i64], &[f64]),
    out_flavours: &[i64],
) -> Vec<f64> {
    evolve(theory, grid, options, &Vectors { in_flavours, values, out_flavours }, &Unwatched).unwrap().values
}

/// What each ask needs: `(nf, lowest, highest)` that are served. Leaves out what is not on the way.
#[test]
fn routes_reach_what_is_asked_and_no_more() {
    let theory = variable(0);
    let top = theory.threshold_q2(6);
    let cases: [(Scale, &[Scale], &[Range]); 9] = [
        // Nothing asked, or the start itself.
        ((1.5, 3), &[], &[(3, 1.5, 1.5)]),
        ((1.5, 3), &[(1.5, 3)], &[(3, 1.5, 1.5)]),
        // Up and down at one nf.
        ((1.5, 3), &[(1.2, 3), (1.9, 3)], &[(3, 1.2, 1.9)]),
        // Through one threshold and through two.
        ((1.5, 3), &[(10.0, 4)], &[(3, 1.5, CHARM_Q2), (4, CHARM_Q2, 10.0)]),
        ((1.5, 3), &[(100.0, 5)], &[(3, 1.5, CHARM_Q2), (4, CHARM_Q2, BOTTOM_Q2), (5, BOTTOM_Q2, 100.0)]),
        // Another nf than the usual one: fewer at the start, more below the threshold.
        ((50.0, 3), &[(100.0, 4)], &[(3, CHARM_Q2, 50.0), (4, CHARM_Q2, 100.0)]),
        ((3.0, 4), &[(1.8, 4), (15.0, 5)], &[(4, 1.8, BOTTOM_Q2), (5, 15.0, BOTTOM_Q2)]),
        // Downwards.
        ((100.0, 5), &[(1.6, 3)], &[(3, 1.6, CHARM_Q2), (4, CHARM_Q2, BOTTOM_Q2), (5, BOTTOM_Q2, 100.0)]),
        // A threshold itself, from both sides.
        (
            (CHARM_Q2, 4),
            &[(CHARM_Q2, 3), (top, 6)],
            &[(3, CHARM_Q2, CHARM_Q2), (4, CHARM_Q2, BOTTOM_Q2), (5, BOTTOM_Q2, top), (6, top, top)],
        ),
    ];
    for (start, asked, expected) in cases {
        let set = built(&theory, &coarse(), &options(start, asked)).unwrap();
        let ranges = set.ranges();
        assert_eq!(ranges.len(), expected.len(), "{start:?} {asked:?}: {ranges:?}");
        for (given, expected) in ranges.iter().zip(expected) {
            assert_eq!(given.0, expected.0);
            // Thresholds are squares of rounded masses.
            close(given.1, expected.1, 1e-15);
            close(given.2, expected.2, 1e-15);
        }
        assert_eq!(set.light(), expected[0].0, "{start:?} {asked:?}");
        set.values(asked, &Unwatched).unwrap();
    }
}

/// Legs without length, at the start and after a threshold at LO, where matching is trivial.
#[test]
fn no_distance_means_unit_blocks() {
    let (theory, grid) = (variable(0), coarse());
    let set = built(&theory, &grid, &options((CHARM_Q2, 3), &[(CHARM_Q2, 3), (CHARM_Q2, 4)])).unwrap();
    assert_eq!(set.steps(), 0);
    for nf in [3, 4] {
        for name in set.names() {
            let one_by_one = name == "ns+" || name.split_once("<-").is_some_and(|(out, input)| out == input);
            let values = block(&set, &grid, name, (CHARM_Q2, nf));
            for (index, value) in values.iter().enumerate() {
                let diagonal = index % (grid.nodes() + 1) == 0;
                // Light flavours are put together from their average: one rounding.
                assert!((value - f64::from(one_by_one && diagonal)).abs() < 1e-15, "{name} nf {nf}: {value}");
            }
        }
    }
}

#[test]
fn scales_off_the_route_are_out_of_range() {
    let set = built(&variable(0), &coarse(), &options((1.5, 3), &[(10.0, 4)])).unwrap();
    for asked in [(1.4, 3), (10.1, 4), (3.0, 3), (1.9, 4), (100.0, 5), (f64::NAN, 4)] {
        match set.values(&[(5.0, 4), asked], &Unwatched) {
            Err(Error::OutOfRange { name: "q2", value, allowed }) => {
                assert!(value.contains(&format!("nf = {}", asked.1)), "{value}");
                assert!(allowed.contains("10.0] with nf = 4"), "{allowed}");
            }
            other => panic!("{asked:?}: {other:?}"),
        }
    }
}

#[test]
fn what_cannot_be_built_is_refused() {
    let (theory, grid) = (variable(2), coarse());
    let build_with = |change: &dyn Fn(&mut BuildOptions)| {
        let mut options = options((1.5, 3), &[(100.0, 5)]);
        change(&mut options);
        built(&theory, &grid, &options).err()
    };
    // Finer than rounding: every refinement is tried.
    match build_with(&|options| options.tolerance = 1e-18) {
        Some(Error::Tolerance { reached, tolerance, steps, nf }) => {
            assert!(reached > tolerance && steps > 0 && (3..=5).contains(&nf), "{reached} {tolerance} {steps} {nf}");
        }
        other => panic!("{other:?}"),
    }
    let refused = |error: Option<Error>, expected: &str| match error {
        Some(Error::Argument { name, .. }) => assert_eq!(name, expected),
        other => panic!("{expected}: {other:?}"),
    };
    for tolerance in [0.0, -1e-8, f64::NAN, f64::INFINITY] {
        refused(build_with(&|options| options.tolerance = tolerance), "tolerance");
    }
    for nf in [0, 2, 7, usize::MAX] {
        refused(build_with(&|options| options.start_nf = nf), "nf");
        refused(build_with(&|options| options.asked = vec![(100.0, nf)]), "nf");
    }
    for flavour in [0, 3, 7] {
        refused(build_with(&|options| options.intrinsic = vec![flavour]), "intrinsic");
    }
    let kernel = || {
        let kernel = Convolved::zeros(grid.nodes() + 1);
        FurtherKernel { order: 0, nf: 4, channel: Channel::NsPlus, kernel }
    };
    let other_grid = build_with(&|options| options.further = vec![kernel()]);
    assert!(matches!(other_grid, Some(Error::Shape { name: "kernel", .. })), "{other_grid:?}");
    for q2 in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        refused(build_with(&|options| options.start_q2 = q2), "q2");
        refused(build_with(&|options| options.asked = vec![(q2, 3)]), "q2");
    }
}

/// Says stop at the question of this number.
struct Stops(usize, AtomicUsize);

impl Watch for Stops {
    fn stop(&self) -> bool {
        self.1.fetch_add(1, Ordering::Relaxed) >= self.0
    }
}

/// Wherever it is stopped, the answer is the same, and the next build is whole.
#[test]
fn a_build_stops_when_told() {
    let (theory, grid) = (variable(1), Grid::new(&[0.0, 0.3, 1.5, 5.001], &[5, 6, 6]).unwrap());
    let options = options((1.5, 3), &[(10.0, 4)]);
    let mut questions = 0;
    loop {
        match build(&theory, &grid, &options, &Stops(questions, AtomicUsize::new(0))) {
            Err(error) => assert_eq!(error, Error::Interrupted),
            Ok(set) => {
                let stopped = set.values(&[(10.0, 4)], &Stops(0, AtomicUsize::new(0)));
                assert_eq!(stopped.err(), Some(Error::Interrupted));
                break;
            }
        }
        questions += 1;
    }
    assert!(questions > grid.panels(), "asked {questions} times");
    let vectors = Vectors { in_flavours: &LIGHT, values: &input(&grid), out_flavours: &LIGHT };
    let stopped = evolve(&theory, &grid, &options, &vectors, &Stops(0, AtomicUsize::new(0)));
    assert_eq!(stopped, Err(Error::Interrupted));
}

/// Up over the charm threshold and down again: the light densities come back, and no charm is left. The equations are
/// solved exactly: rounding, magnified by the condition of `1 + A`.
#[test]
fn up_and_down_without_heavy_quarks_is_nothing() {
    let grid = Grid::preset(1e-5, Resolution::Standard).unwrap();
    for order in [0, 1, 2] {
        let (theory, start) = (variable(order), input(&grid));
        let up = options((CHARM_Q2, 3), &[(CHARM_Q2, 4)]);
        let above = carried(&theory, &grid, &up, (&LIGHT, &start), &TO_CHARM);
        let charm = &above[..grid.nodes()];
        let made = charm.iter().fold(0.0_f64, |most, c| most.max(c.abs()));
        // Pole masses: charm begins at a^2.
        assert_eq!(made > 1e-4, order == 2, "order {order}: charm of {made}");
        let down = options((CHARM_Q2, 4), &[(CHARM_Q2, 3)]);
        let back = carried(&theory, &grid, &down, (&TO_CHARM, &above), &TO_CHARM);
        let nodes = grid.nodes();
        let largest = start.iter().fold(0.0_f64, |most, f| most.max(f.abs()));
        let light = difference(&back[nodes..8 * nodes], &start);
        let left = back[..nodes].iter().chain(&back[8 * nodes..]).fold(0.0_f64, |most, c| most.max(c.abs()));
        println!("order {order}: light {light:.1e}, charm {left:.1e} of {largest}");
        assert!(light < 1e-12 * largest && left < 1e-12 * largest, "order {order}: {light:.1e} {left:.1e}");
    }
}

/// Momentum above `x_min` and what has flowed below it add up to what there was, through two thresholds, at LO and NLO
/// (the NNLO parametrisations keep it to their own accuracy). For each input channel; 1e-7 is what interpolation leaves
/// at standard resolution.
#[test]
fn momentum_above_and_below_x_min_is_kept() {
    let grid = Grid::preset(1e-5, Resolution::Standard).unwrap();
    let end = (1e4, 5);
    for order in [0, 1] {
        let set = built(&variable(order), &grid, &options((1.5, 3), &[end])).unwrap();
        let (_, flows) = set.values(&[end], &Unwatched).unwrap();
        let weights = grid.moment_weights(1.0);
        for (input, start) in [("gluon", density(&grid, -0.2, 5)), ("light+", density(&grid, -0.1, 4))] {
            let ending = format!("<-{input}");
            let blocks = set.names().iter().filter(|name| name.ends_with(&ending));
            let above: f64 =
                blocks.map(|name| dot(&weights, &builds::acting(&block(&set, &grid, name, end), &start))).sum();
            let index = set.flow_names().iter().position(|name| name == &format!("momentum<-{input}")).unwrap();
            let below = dot(&flows[index * grid.nodes()..(index + 1) * grid.nodes()], &start);
            let kept = (above + below) / dot(&weights, &start);
            println!("order {order}, {input}: {:.1e}, below {below:.1e}", kept - 1.0);
            assert!(below > 1e-6 && above > below);
            close(kept, 1.0, 1e-7);
        }
    }
}

/// Densities carried without operators are what the operators make of them, at any scale of the route. Rounding alone
/// differs.
#[test]
fn vectors_and_operators_agree() {
    let (theory, grid) = (variable(2), coarse());
    let asked = [(1.5, 3), (1.7, 3), (7.0, 4), (BOTTOM_Q2, 4), (BOTTOM_Q2, 5), (90.0, 5)];
    let start = input(&grid);
    let set = built(&theory, &grid, &options((1.5, 3), &asked)).unwrap();
    let vectors = carried(&theory, &grid, &options((1.5, 3), &asked), (&LIGHT, &start), &[21, 5, -5]);
    let nodes = grid.nodes();
    let light: Vec<f64> = (0..nodes)
        .map(|i| (0..7).filter(|&flavour| flavour != 3).map(|flavour| start[flavour * nodes + i]).sum())
        .collect();
    let gluon = &start[3 * nodes..4 * nodes];
    for (index, scale) in asked.into_iter().enumerate() {
        let flavour = |place: usize| &vectors[(3 * index + place) * nodes..(3 * index + place + 1) * nodes];
        let both: Vec<f64> = flavour(1).iter().zip(flavour(2)).map(|(b, bbar)| b + bbar).collect();
        for (output, given) in [("gluon", flavour(0)), ("bottom+", &both)] {
            let from =
                |input: &str, f: &[f64]| builds::acting(&block(&set, &grid, &format!("{output}<-{input}"), scale), f);
            let expected: Vec<f64> =
                from("gluon", gluon).iter().zip(from("light+", &light)).map(|(a, b)| a + b).collect();
            let worst = difference(given, &expected);
            assert!(worst < 1e-12, "{output} at {scale:?}: {worst:.1e}");
        }
    }
}

/// Flavours that there are none of, and orders that would fill the memory, are refused.
#[test]
fn what_cannot_be_carried_is_refused() {
    let grid = Grid::preset(1e-2, Resolution::Standard).unwrap();
    let mut refused = options((2.0, 3), &[(2.0, 3)]);
    let vectors = Vectors { in_flavours: &[7], values: &vec![0.0; grid.nodes()], out_flavours: &[21] };
    let named = |error: &Error, expected: &str| matches!(error, Error::Argument { name, .. } if *name == expected);
    assert!(named(&evolve(&variable(0), &grid, &refused, &vectors, &Unwatched).unwrap_err(), "flavour"));
    let kernel = Convolved::zeros(grid.nodes());
    refused.further.push(FurtherKernel { order: 9, nf: 3, channel: Channel::NsPlus, kernel });
    let error = build(&variable(0), &grid, &refused, &Unwatched).err().unwrap();
    assert!(named(&error, "order"), "{error}");
}
