//! The finished set of operators: distinct blocks for each scale.

use super::columns::{Columns, Family, LegColumns};
use super::crossing::Crossing;
use super::route::{Entry, Route};
use crate::convolution::{KernelSet, kernels_on};
use crate::error::{Error, Result};
use crate::evolution::{FixedFlavour, FurtherKernel, Plan, Sector, Stretch};
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use crate::watch::Watch;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// How many times steps are halved before a build gives up.
const MOST_REFINEMENTS: u32 = 3;
/// Powers a and b of the quark densities `x^a (1-x)^b` on which steps are judged, sea-like and valence-like; the gluon
/// that goes with both is sea-like.
const PROBES: [(f64, i32); 2] = [(-0.2, 6), (0.6, 3)];
/// Names of the heavy flavours 4, 5, 6.
const HEAVY_NAMES: [&str; 3] = ["charm", "bottom", "top"];

/// What is to be built.
pub struct BuildOptions {
    /// Scale of the input, GeV^2.
    pub start_q2: f64,
    /// Number of flavours of the input.
    pub start_nf: usize,
    /// Scales in GeV^2, with the number of flavours at each.
    pub asked: Vec<(f64, usize)>,
    /// Heavy flavours above `start_nf` that the input may hold.
    pub intrinsic: Vec<usize>,
    /// Relative accuracy of the steps.
    pub tolerance: f64,
    /// Kernels of the user.
    pub further: Vec<FurtherKernel>,
}

/// A set of operators, dense in scale along its route.
pub struct Evolution {
    theory: Theory,
    nodes: usize,
    route: Route,
    chunks: Vec<Chunk>,
    names: Vec<String>,
    flow_names: Vec<String>,
    error: f64,
    steps: usize,
}

/// Columns that belong to one panel of input nodes: they are carried along the whole route by themselves.
struct Chunk {
    family: Family,
    /// `(input channel, input node)` of each column; the channel is an index into [`Inputs::channels`].
    columns: Vec<(usize, usize)>,
    legs: Vec<LegColumns>,
}

/// Everything that serves all columns of a route.
pub(super) struct Prepared {
    pub route: Route,
    /// One a leg.
    stretches: Vec<Stretch>,
    /// One a leg; none for those that leave the start.
    crossings: Vec<Option<Crossing>>,
    offsets: Vec<usize>,
}

impl Prepared {
    pub fn new(
        theory: &Theory,
        grid: &Grid,
        kernels: &KernelSet,
        options: &BuildOptions,
        plan: &Plan,
        watch: &dyn Watch,
    ) -> Result<Self> {
        let route = Route::plan(theory, options.start_q2, options.start_nf, &options.asked);
        let offsets = grid.offsets().to_vec();
        let equations: BTreeMap<usize, FixedFlavour> = (route.light..=route.most)
            .map(|nf| (nf, FixedFlavour::new(theory, kernels, &options.further, nf, &offsets)))
            .collect();
        let stretches = route
            .legs
            .par_iter()
            .map(|leg| {
                let (from, to) = (scale(theory, leg.from_q2, leg.nf)?, scale(theory, leg.to_q2, leg.nf)?);
                Stretch::new(&equations[&leg.nf], from, to, plan, watch)
            })
            .collect::<Result<_>>()?;
        let crossings = route
            .legs
            .iter()
            .map(|leg| match leg.entry {
                Entry::Start => Ok(None),
                Entry::Crossing { from_leg } => {
                    let below = leg.nf.min(route.legs[from_leg].nf);
                    Crossing::new(theory, kernels, below, grid.nodes()).map(Some)
                }
            })
            .collect::<Result<_>>()?;
        Ok(Self { route, stretches, crossings, offsets })
    }

    /// Carries columns along every leg. Rows of panels before `first` are zero.
    pub fn carry(&self, theory: &Theory, start: &Columns, first: usize) -> Result<Vec<LegColumns>> {
        let mut legs: Vec<LegColumns> = Vec::new();
        for (index, leg) in self.route.legs.iter().enumerate() {
            let entry = match (leg.entry, &self.crossings[index]) {
                (Entry::Crossing { from_leg }, Some(crossing)) => {
                    let from_nf = self.route.legs[from_leg].nf;
                    let mut columns = legs[from_leg].at(scale(theory, leg.from_q2, from_nf)?);
                    if leg.nf > from_nf {
                        crossing.up(&mut columns);
                    } else {
                        crossing.down(&mut columns);
                    }
                    columns
                }
                _ => start.clone(),
            };
            legs.push(LegColumns::new(entry, &self.stretches[index], leg.nf, &self.offsets, first));
        }
        Ok(legs)
    }

    /// Whether two sectors evolve alike on every leg.
    pub fn same(&self, one: Sector, other: Sector) -> bool {
        self.stretches.iter().all(|stretch| stretch.same(one, other))
    }

    fn steps(&self) -> usize {
        self.stretches.iter().map(Stretch::steps).sum()
    }
}

/// `s = ln a` at a factorisation scale.
pub(super) fn scale(theory: &Theory, q2: f64, nf: usize) -> Result<f64> {
    theory.a_at_factorisation(q2, nf).map(f64::ln)
}

/// Builds the set.
///
/// # Errors
/// [`Error::Tolerance`] where the steps do not reach the tolerance; those of the running coupling;
/// [`Error::Interrupted`].
pub fn build(theory: &Theory, grid: &Grid, options: &BuildOptions, watch: &dyn Watch) -> Result<Evolution> {
    let (prepared, inputs, error) = prepare(theory, grid, options, watch)?;
    finish(theory, grid, prepared, &inputs, error, watch)
}

/// Factors the equations of a route finely enough for the tolerance; also returns the error reached.
pub(super) fn prepare(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    watch: &dyn Watch,
) -> Result<(Prepared, Inputs, f64)> {
    let kernels = kernels_on(grid, watch)?;
    let mut refinement = 0;
    loop {
        let plan = Plan { tolerance: options.tolerance, refinement };
        let prepared = Prepared::new(theory, grid, &kernels, options, &plan, watch)?;
        let inputs = Inputs::of(&prepared, options);
        let error = inputs.probe(theory, grid, &prepared)?;
        if error <= options.tolerance {
            return Ok((prepared, inputs, error));
        }
        if refinement == MOST_REFINEMENTS {
            let (nf, tolerance, steps) = (options.start_nf, options.tolerance, prepared.steps());
            return Err(Error::Tolerance { nf, reached: error, tolerance, steps });
        }
        refinement += 1;
    }
}

/// Carries the unit columns of all families.
fn finish(
    theory: &Theory,
    grid: &Grid,
    prepared: Prepared,
    inputs: &Inputs,
    error: f64,
    watch: &dyn Watch,
) -> Result<Evolution> {
    let families = inputs.families(&prepared);
    let tasks: Vec<(Family, usize)> =
        families.iter().flat_map(|&family| (0..grid.panels()).map(move |panel| (family, panel))).collect();
    let chunks: Vec<Chunk> = tasks
        .par_iter()
        .map(|&(family, panel)| {
            watch.check()?;
            let (columns, start) = inputs.start(family, grid, panel);
            Ok(Chunk { family, columns, legs: prepared.carry(theory, &start, panel)? })
        })
        .collect::<Result<_>>()?;
    let steps = prepared.steps();
    let (names, flow_names) = (inputs.block_names(&families), inputs.flow_names(&families));
    let (theory, nodes, route) = (theory.clone(), grid.nodes(), prepared.route);
    Ok(Evolution { theory, nodes, route, chunks, names, flow_names, error, steps })
}

/// What the input of a route consists of.
pub(super) struct Inputs {
    pub light: usize,
    /// Heavy flavours of the input, each an input channel after gluon and light sum.
    pub heavy: Vec<usize>,
    /// Heavy flavours of the output.
    heavy_out: Vec<usize>,
}

impl Inputs {
    fn of(prepared: &Prepared, options: &BuildOptions) -> Self {
        let light = prepared.route.light;
        let mut heavy: Vec<usize> = (light + 1..=options.start_nf).chain(options.intrinsic.iter().copied()).collect();
        heavy.sort_unstable();
        heavy.dedup();
        let mut heavy_out: Vec<usize> = (light + 1..=prepared.route.most).chain(heavy.iter().copied()).collect();
        heavy_out.sort_unstable();
        heavy_out.dedup();
        Self { light, heavy, heavy_out }
    }

    /// Families whose operators differ from those of another.
    fn families(&self, prepared: &Prepared) -> Vec<Family> {
        let mut families = vec![Family::Plus, Family::NsPlus];
        if !prepared.same(Sector::NsMinus, Sector::NsPlus) {
            families.push(Family::NsMinus);
        }
        if !prepared.same(Sector::Valence, Sector::NsMinus) || !self.heavy.is_empty() {
            families.push(Family::Minus);
        }
        families
    }

    /// Names of the input channels of a family.
    fn channels(&self, family: Family) -> Vec<String> {
        let heavy = |sign: &str| -> Vec<String> {
            self.heavy.iter().map(|flavour| format!("{}{sign}", HEAVY_NAMES[flavour - 4])).collect()
        };
        match family {
            Family::Plus => [vec!["gluon".into(), "light+".into()], heavy("+")].concat(),
            Family::Minus => [vec!["light-".into()], heavy("-")].concat(),
            Family::NsPlus => vec!["ns+".into()],
            Family::NsMinus => vec!["ns-".into()],
        }
    }

    /// Names of the output channels of a family.
    fn outputs(&self, family: Family) -> Vec<String> {
        let heavy = |sign: &str| -> Vec<String> {
            self.heavy_out.iter().map(|flavour| format!("{}{sign}", HEAVY_NAMES[flavour - 4])).collect()
        };
        match family {
            Family::Plus => [vec!["gluon".into(), "light+".into()], heavy("+")].concat(),
            Family::Minus => [vec!["light-".into()], heavy("-")].concat(),
            Family::NsPlus | Family::NsMinus => self.channels(family),
        }
    }

    fn block_names(&self, families: &[Family]) -> Vec<String> {
        families
            .iter()
            .flat_map(|&family| match family {
                Family::NsPlus | Family::NsMinus => self.channels(family),
                _ => {
                    let inputs = self.channels(family);
                    let pair = |out: &String| inputs.iter().map(|from| format!("{out}<-{from}")).collect::<Vec<_>>();
                    self.outputs(family).iter().flat_map(pair).collect()
                }
            })
            .collect()
    }

    /// Flows below `x_min`: momentum from each plus channel, number of each minus block.
    fn flow_names(&self, families: &[Family]) -> Vec<String> {
        families
            .iter()
            .flat_map(|&family| match family {
                Family::Plus => {
                    self.channels(family).iter().map(|channel| format!("momentum<-{channel}")).collect::<Vec<_>>()
                }
                _ => self.block_names(&[family]).iter().map(|name| format!("number:{name}")).collect(),
            })
            .collect()
    }

    /// Error estimate of the steps: smooth densities of every family are carried along the route.
    ///
    /// Unit columns would tell little: the error of the steps lies in what is rough in x, of which a density has next
    /// to nothing.
    fn probe(&self, theory: &Theory, grid: &Grid, prepared: &Prepared) -> Result<f64> {
        // Nearer to x = 1 values fall over decades, and no accuracy relative to them is promised.
        const LARGEST_X: f64 = 0.9;
        let judged: Vec<usize> = (0..grid.nodes()).filter(|&i| grid.u()[i] >= -LARGEST_X.ln()).collect();
        let errors = self
            .families(prepared)
            .par_iter()
            .map(|&family| {
                let mut start = Columns::new(family, self.light, grid.nodes() + 1, PROBES.len());
                let shape = |(power, fall): (f64, i32), u: f64| (-power * u).exp() * (-(-u).exp_m1()).powi(fall);
                for (column, quark) in PROBES.into_iter().enumerate() {
                    for (i, &u) in grid.u().iter().enumerate() {
                        start.light_mut().row_mut(i)[column] = shape(quark, u);
                        if family == Family::Plus {
                            start.gluon_mut().row_mut(i)[column] = 2.0 * shape(PROBES[0], u);
                        }
                    }
                }
                for flavour in &self.heavy {
                    start.set_heavy(*flavour, start.empty());
                }
                let legs = prepared.carry(theory, &start, 0)?;
                Ok(legs.iter().map(|leg| leg.error(&judged)).fold(0.0, f64::max))
            })
            .collect::<Result<Vec<f64>>>()?;
        Ok(errors.into_iter().fold(0.0, f64::max))
    }

    /// Unit columns of the nodes that a panel owns, one set for each input channel.
    fn start(&self, family: Family, grid: &Grid, panel: usize) -> (Vec<(usize, usize)>, Columns) {
        let owned = grid.owned(panel);
        let count = self.channels(family).len();
        let columns: Vec<(usize, usize)> =
            (0..count).flat_map(|channel| owned.clone().map(move |node| (channel, node))).collect();
        let mut start = Columns::new(family, self.light, grid.nodes() + 1, columns.len());
        for (index, flavour) in self.heavy.iter().enumerate() {
            if matches!(family, Family::Plus | Family::Minus) {
                let mut unit = start.empty();
                let channel = index + count - self.heavy.len();
                set_units(&mut unit, &columns, channel);
                start.set_heavy(*flavour, unit);
            }
        }
        match family {
            Family::Plus => {
                set_units(start.gluon_mut(), &columns, 0);
                set_units(start.light_mut(), &columns, 1);
            }
            _ => set_units(start.light_mut(), &columns, 0),
        }
        (columns, start)
    }
}

fn set_units(matrix: &mut Matrix, columns: &[(usize, usize)], channel: usize) {
    for (column, (from, node)) in columns.iter().enumerate() {
        if *from == channel {
            matrix.row_mut(*node)[column] = 1.0;
        }
    }
}

impl Evolution {
    /// Names of the blocks, each `output<-input`, or `ns+`, `ns-` for differences among light flavours.
    pub fn names(&self) -> &[String] {
        &self.names
    }

    /// Names of the flows below `x_min`.
    pub fn flow_names(&self) -> &[String] {
        &self.flow_names
    }

    /// Number of flavours that act alike along the whole route.
    pub fn light(&self) -> usize {
        self.route.light
    }

    /// Largest estimated relative error of a step.
    pub fn error(&self) -> f64 {
        self.error
    }

    /// Number of steps over all legs.
    pub fn steps(&self) -> usize {
        self.steps
    }

    /// `(nf, lowest q2, highest q2)` of what is served.
    pub fn ranges(&self) -> Vec<(usize, f64, f64)> {
        self.route.ranges()
    }

    /// Blocks `(scale, block, node, node)` and flows `(scale, flow, node)` at any scales of the route.
    ///
    /// # Errors
    /// [`Error::OutOfRange`] for a scale that is not on the route; [`Error::Interrupted`].
    pub fn values(&self, asked: &[(f64, usize)], watch: &dyn Watch) -> Result<(Vec<f64>, Vec<f64>)> {
        let n = self.nodes;
        let (block, flow) = (self.names.len() * n * n, self.flow_names.len() * n);
        let mut blocks = vec![0.0; asked.len() * block];
        let mut flows = vec![0.0; asked.len() * flow];
        blocks.par_chunks_mut(block.max(1)).zip(flows.par_chunks_mut(flow.max(1))).zip(asked).try_for_each(
            |((blocks, flows), &(q2, nf))| {
                watch.check()?;
                self.write(q2, nf, blocks, flows)
            },
        )?;
        Ok((blocks, flows))
    }

    fn write(&self, q2: f64, nf: usize, blocks: &mut [f64], flows: &mut [f64]) -> Result<()> {
        let leg = self.route.leg_of(q2, nf)?;
        let s = scale(&self.theory, q2, nf)?;
        for chunk in &self.chunks {
            let columns = chunk.legs[leg].at(s);
            let inputs = chunk.columns.iter().map(|(channel, _)| channel + 1).max().unwrap_or(1);
            let first = self.first_block(chunk.family);
            let outputs = self.outputs(&columns, chunk.family);
            for (output, matrix) in outputs.iter().enumerate() {
                let Some(matrix) = matrix else { continue };
                for (column, &(channel, node)) in chunk.columns.iter().enumerate() {
                    let block = (first.0 + output * inputs + channel) * self.nodes * self.nodes;
                    for i in 0..self.nodes {
                        blocks[block + i * self.nodes + node] = matrix.row(i)[column];
                    }
                    if chunk.family != Family::Plus {
                        let flow = (first.1 + output * inputs + channel) * self.nodes;
                        flows[flow + node] = matrix.row(self.nodes)[column];
                    } else if output == 0 {
                        flows[(first.1 + channel) * self.nodes + node] = matrix.row(self.nodes)[column];
                    }
                }
            }
        }
        Ok(())
    }

    /// Where the blocks and the flows of a family begin.
    fn first_block(&self, family: Family) -> (usize, usize) {
        let is_first = |name: &str| match family {
            Family::Plus => name.contains("gluon"),
            Family::NsPlus => name.ends_with("ns+"),
            Family::NsMinus => name.ends_with("ns-"),
            Family::Minus => name.contains("light-<-light-"),
        };
        let position = |names: &[String]| names.iter().position(|name| is_first(name)).unwrap_or_default();
        (position(&self.names), position(&self.flow_names))
    }

    /// The output matrices of a family in the order of the names.
    fn outputs<'a>(&self, columns: &'a Columns, family: Family) -> Vec<Option<&'a Matrix>> {
        let mut outputs = match family {
            Family::Plus => vec![Some(columns.gluon()), Some(columns.light_sum())],
            _ => vec![Some(columns.light_sum())],
        };
        if matches!(family, Family::Plus | Family::Minus) {
            let sign = if family == Family::Plus { '+' } else { '-' };
            for (index, name) in HEAVY_NAMES.iter().enumerate() {
                if self.names.iter().any(|block| block.starts_with(&format!("{name}{sign}<-"))) {
                    outputs.push(columns.heavy(index + 4));
                }
            }
        }
        outputs
    }
}
