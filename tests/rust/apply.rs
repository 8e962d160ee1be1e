//! Sets applied to densities and to one another: the flavours in and out, whatever the blocks are.

#[expect(dead_code, reason = "other tests use the rest")]
mod builds;
#[expect(dead_code, reason = "other tests use the rest")]
mod settings;

use builds::{built, coarse, difference, options, theory};
use scalewright_core::apply::{Batch, Blocks, Set, apply, check_flavour, compose};
use scalewright_core::error::{Error, Result};
use scalewright_core::numerics::blocks::Matrix;
use scalewright_core::watch::{Unwatched, Watch};
use settings::benchmark;

const ALL: [i64; 13] = [-6, -5, -4, -3, -2, -1, 21, 1, 2, 3, 4, 5, 6];

/// Made-up numbers between -1 and 1 (multiplicative congruence).
fn numbers(count: usize) -> Vec<f64> {
    let next = |state: &mut u64| {
        *state = *state * 48271 % 2_147_483_647;
        Some(*state as f64 / 1_073_741_823.5 - 1.0)
    };
    std::iter::repeat_n((), count).scan(12345, |state, ()| next(state)).collect()
}

/// A set with blocks of `n x n` values.
fn set(names: &[String], light: usize, n: usize, values: &[f64]) -> Set {
    let matrices = values.chunks(n * n).map(|block| Matrix::from_values(n, n, block.to_vec())).collect();
    Set { blocks: Blocks::new(names, light).unwrap(), values: matrices }
}

/// A set of unit blocks for the diagonal and zeros elsewhere: `light` flavours alike, those up to `most` on their own.
fn unit(light: usize, most: usize, n: usize) -> Set {
    let heavy =
        |sign: char| ["charm", "bottom", "top"][light - 3..most - 3].iter().map(move |name| format!("{name}{sign}"));
    let plus: Vec<String> = ["gluon".into(), "light+".into()].into_iter().chain(heavy('+')).collect();
    let minus: Vec<String> = std::iter::once("light-".into()).chain(heavy('-')).collect();
    let mut names = vec!["ns+".to_owned()];
    for family in [plus, minus] {
        names.extend(family.iter().flat_map(|out| family.iter().map(move |input| format!("{out}<-{input}"))));
    }
    let one = |name: &String| name.split_once("<-").is_none_or(|(out, input)| out == input);
    let values = names.iter().map(|name| if one(name) { Matrix::identity(n) } else { Matrix::zeros(n, n) }).collect();
    Set { blocks: Blocks::new(&names, light).unwrap(), values }
}

/// `(replica, flavour, node)` of the output; the blocks of one scale.
fn applied(set: &Set, densities: &[f64], in_flavours: &[i64], out_flavours: &[i64]) -> Result<Vec<f64>> {
    let n = set.values[0].rows();
    let values: Vec<f64> = set.values.iter().flat_map(Matrix::values).copied().collect();
    let (blocks, block_count) = (&set.blocks, set.values.len());
    let batch = Batch { blocks, block_count, values: &values, nodes: n, densities, in_flavours, out_flavours };
    let mut out = vec![f64::NAN; densities.len() / in_flavours.len() * out_flavours.len()];
    apply(&batch, &mut out, &Unwatched).map(|()| out)
}

/// Flavours into combinations, unit blocks, and back: the input, for every number of light flavours. Rounding of
/// sums over six flavours.
#[test]
fn unit_blocks_return_the_input() {
    let n = 5;
    let densities = numbers(3 * ALL.len() * n);
    for (light, most) in [(3, 6), (4, 6), (5, 6), (6, 6)] {
        let out = applied(&unit(light, most, n), &densities, &ALL, &ALL).unwrap();
        assert!(difference(&out, &densities) < 1e-14, "light = {light}: {:.1e}", difference(&out, &densities));
        // Some of them alone, in another order; what is not given is zero.
        let out = applied(&unit(light, most, n), &densities[..3 * n], &[2, 21, -4], &[21, 1, -4, 2]).unwrap();
        let expected = [&densities[n..2 * n], &vec![0.0; n], &densities[2 * n..3 * n], &densities[..n]].concat();
        assert!(difference(&out, &expected) < 1e-14, "light = {light}");
    }
}

/// Blocks written out by hand: `q = (q+ + q-)/2`, light flavours by their mean and what they differ from it.
#[test]
fn every_flavour_goes_by_its_blocks() {
    let names = ["gluon<-gluon", "gluon<-light+", "light+<-gluon", "light+<-light+", "ns+", "ns-", "light-<-light-"];
    let names = names.map(String::from);
    let [gg, gq, qg, qq, plus, minus, valence] = [2.0, 3.0, 5.0, 7.0, 11.0, 13.0, 17.0];
    let set = set(&names, 3, 1, &[gg, gq, qg, qq, plus, minus, valence]);
    let flavours = [21, 1, -1, 2, -2, 3, -3];
    let [g, d, dbar, u, ubar, s, sbar] = [1.5, 0.5, 0.25, 2.0, 0.75, 0.125, 0.375];
    let out = applied(&set, &[g, d, dbar, u, ubar, s, sbar], &flavours, &[21, 2, -2, 3, 4]).unwrap();
    let (sum, difference_sum) = (d + dbar + u + ubar + s + sbar, d - dbar + u - ubar + s - sbar);
    let carried = |quark: f64, anti: f64, sign: f64| {
        let both = plus * (quark + anti - sum / 3.0) + (qg * g + qq * sum) / 3.0;
        let one = minus * (quark - anti - difference_sum / 3.0) + valence * difference_sum / 3.0;
        0.5 * (both + sign * one)
    };
    let expected = [gg * g + gq * sum, carried(u, ubar, 1.0), carried(u, ubar, -1.0), carried(s, sbar, 1.0), 0.0];
    // Rounding of values up to 30.
    assert!(difference(&out, &expected) < 1e-13, "{out:?} instead of {expected:?}");
}

/// A replica alone has the bits it has among two hundred.
#[test]
fn company_changes_no_bit() {
    let n = 7;
    let names = unit(4, 5, n).blocks.names().to_vec();
    let set = set(&names, 4, n, &numbers(names.len() * n * n));
    let flavours = [-4, -2, 21, 1, 2, 3, 5];
    let densities = numbers(200 * flavours.len() * n);
    let out = applied(&set, &densities, &flavours, &ALL).unwrap();
    for replica in [0, 1, 191, 199] {
        let size = flavours.len() * n;
        let alone = applied(&set, &densities[replica * size..(replica + 1) * size], &flavours, &ALL).unwrap();
        assert_eq!(alone, out[replica * ALL.len() * n..(replica + 1) * ALL.len() * n], "replica {replica}");
    }
}

/// Applying the composed set is applying one after the other, also where the sets differ in what acts alike: blocks
/// of real builds and of made-up numbers. Rounding, relative to the largest value.
#[test]
fn composed_is_one_after_the_other() {
    let grid = coarse();
    let (theory, n) = (theory(benchmark(2, 3, 6, 3)), grid.nodes());
    let build = |start, end| {
        let built = built(&theory, &grid, &options(start, &[end])).unwrap();
        let (values, _) = built.values(&[end], &Unwatched).unwrap();
        set(built.names(), built.light(), n, &values)
    };
    let [low, middle, high] = [(1.5, 3), (10.0, 4), (100.0, 5)];
    let made_up = |light: usize, most: usize| {
        let names = unit(light, most, n).blocks.names().to_vec();
        set(&names, light, n, &numbers(names.len() * n * n))
    };
    let pairs = [
        (build(low, middle), build(middle, high)),
        (build(low, (1.8, 3)), build((1.8, 3), middle)),
        (build(high, middle), build(middle, low)),
        (unit(3, 5, n), made_up(4, 5)),
        (made_up(4, 6), made_up(3, 6)),
    ];
    for (case, (first, second)) in pairs.iter().enumerate() {
        let inputs: Vec<i64> = ALL.into_iter().filter(|&flavour| first.blocks.accepts(flavour)).collect();
        let passed: Vec<i64> = ALL.into_iter().filter(|&flavour| second.blocks.accepts(flavour)).collect();
        let densities = numbers(2 * inputs.len() * n);
        let between = applied(first, &densities, &inputs, &passed).unwrap();
        let expected = applied(second, &between, &passed, &ALL).unwrap();
        let (names, light, mut values) = compose(first, std::slice::from_ref(second)).unwrap();
        let composed = Set { blocks: Blocks::new(&names, light).unwrap(), values: values.remove(0) };
        let given = applied(&composed, &densities, &inputs, &ALL).unwrap();
        let largest = expected.iter().fold(1.0_f64, |most, value| most.max(value.abs()));
        let worst = difference(&given, &expected);
        println!("case {case}: {worst:.1e} of {largest:.1e}");
        assert!(worst < 1e-12 * largest, "case {case}: {worst:.1e} of {largest:.1e}");
    }
    let (names, light, values) = compose(&pairs[0].0, &[]).unwrap();
    assert_eq!((names.len(), light, values.len()), (pairs[0].0.values.len(), 3, 0));
}

/// Charm in the input: refused unless the set was built for it; then it is one of the inputs, and below its threshold
/// it stays as it is.
#[test]
fn intrinsic_charm_is_carried_where_named() {
    let (grid, asked) = (coarse(), (1.8, 3));
    let theory = theory(benchmark(1, 3, 6, 3));
    let n = grid.nodes();
    let densities = numbers(2 * n);
    for intrinsic in [vec![], vec![4]] {
        let mut options = options((1.5, 3), &[asked]);
        options.intrinsic.clone_from(&intrinsic);
        let built = built(&theory, &grid, &options).unwrap();
        let (values, _) = built.values(&[asked], &Unwatched).unwrap();
        let out = applied(&set(built.names(), built.light(), n, &values), &densities, &[4, -4], &[4, -4, 21]);
        if intrinsic.is_empty() {
            match out {
                Err(Error::Argument { name: "flavour", value, .. }) => assert_eq!(value, "4"),
                other => panic!("{other:?}"),
            }
        } else {
            let out = out.unwrap();
            assert!(difference(&out[..2 * n], &densities) < 1e-15, "constant below its threshold");
            assert!(out[2 * n..].iter().all(|value| *value == 0.0), "no gluon of it");
        }
    }
}

struct Stopped;

impl Watch for Stopped {
    fn stop(&self) -> bool {
        true
    }
}

#[test]
fn what_cannot_be_applied_is_refused() {
    let set = unit(3, 3, 2);
    for flavour in [0, 7, -7, 22, i64::MIN, i64::MAX] {
        for (inputs, outputs) in [([flavour], [21]), ([21], [flavour])] {
            let refused = applied(&set, &[1.0, 2.0], &inputs, &outputs);
            assert!(matches!(refused, Err(Error::Argument { name: "flavour", .. })), "{refused:?}");
        }
        if !ALL.contains(&flavour) {
            assert!(check_flavour(flavour).is_err());
        }
    }
    assert!(ALL.into_iter().all(|flavour| check_flavour(flavour).is_ok()));
    let missing = Blocks::new(&["gluon<-gluon".into()], 3);
    assert!(matches!(missing, Err(Error::Argument { name: "block names", .. })), "{missing:?}");
    for light in [0, 2, 7] {
        let refused = Blocks::new(set.blocks.names(), light);
        assert!(matches!(refused, Err(Error::Argument { name: "light", .. })), "{refused:?}");
    }
    let (values, densities) = (numbers(set.values.len() * 4), [1.0, 2.0]);
    let batch = Batch {
        blocks: &set.blocks,
        block_count: set.values.len(),
        values: &values,
        nodes: 2,
        densities: &densities,
        in_flavours: &[21],
        out_flavours: &[21],
    };
    assert_eq!(apply(&batch, &mut [0.0; 2], &Stopped), Err(Error::Interrupted));
}
