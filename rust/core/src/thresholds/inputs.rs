//! What the input of a route consists of: which families and channels there are, and what they are called.

use super::columns::{Columns, Family};
use super::prepared::{BuildOptions, Prepared};
use crate::error::Result;
use crate::evolution::Sector;
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use rayon::prelude::*;

/// Powers a and b of the quark densities `x^a (1-x)^b` on which steps are judged, sea-like and valence-like; the gluon
/// that goes with both is sea-like.
const PROBES: [(f64, i32); 2] = [(-0.2, 6), (0.6, 3)];
/// Names of the heavy flavours 4, 5, 6.
const HEAVY_NAMES: [&str; 3] = ["charm", "bottom", "top"];

/// A density that is asked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Output {
    /// The gluon.
    Gluon,
    /// The sum of the light flavours; for a non-singlet family the only content.
    Light,
    /// One heavy flavour.
    Heavy(usize),
}

/// Where the blocks and flows of a family stand in the lists of all.
pub struct Layout {
    /// The family.
    pub family: Family,
    /// Number of input channels.
    pub inputs: usize,
    /// Outputs, each with a block for every input channel.
    pub outputs: Vec<Output>,
    /// Index of its first block.
    pub first_block: usize,
    /// Index of its first flow.
    pub first_flow: usize,
}

/// What the input of a route consists of.
pub struct Inputs {
    pub light: usize,
    /// Heavy flavours of the input, each an input channel after gluon and light sum.
    pub heavy: Vec<usize>,
    /// Heavy flavours of the output.
    heavy_out: Vec<usize>,
}

impl Inputs {
    pub fn of(prepared: &Prepared, options: &BuildOptions) -> Self {
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
    pub fn families(&self, prepared: &Prepared) -> Vec<Family> {
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

    /// The outputs of a family.
    fn outputs(&self, family: Family) -> Vec<Output> {
        let heavy = self.heavy_out.iter().map(|&flavour| Output::Heavy(flavour));
        match family {
            Family::Plus => [Output::Gluon, Output::Light].into_iter().chain(heavy).collect(),
            Family::Minus => [Output::Light].into_iter().chain(heavy).collect(),
            Family::NsPlus | Family::NsMinus => vec![Output::Light],
        }
    }

    /// Where the blocks and flows of each family stand, in the order of the names.
    pub fn layouts(&self, families: &[Family]) -> Vec<Layout> {
        let (mut first_block, mut first_flow) = (0, 0);
        families
            .iter()
            .map(|&family| {
                let (inputs, outputs) = (self.channels(family).len(), self.outputs(family));
                let layout = Layout { family, inputs, outputs, first_block, first_flow };
                first_block += self.block_names(&[family]).len();
                first_flow += self.flow_names(&[family]).len();
                layout
            })
            .collect()
    }

    /// Names of the blocks of some families.
    pub fn block_names(&self, families: &[Family]) -> Vec<String> {
        families
            .iter()
            .flat_map(|&family| match family {
                Family::NsPlus | Family::NsMinus => self.channels(family),
                _ => {
                    let inputs = self.channels(family);
                    let name = |output: &Output| output_name(*output, family);
                    let row = |output: &Output| {
                        inputs.iter().map(|from| format!("{}<-{from}", name(output))).collect::<Vec<_>>()
                    };
                    self.outputs(family).iter().flat_map(row).collect()
                }
            })
            .collect()
    }

    /// Flows below `x_min`: momentum from each plus channel, number of each minus block.
    pub fn flow_names(&self, families: &[Family]) -> Vec<String> {
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
    pub fn probe(&self, theory: &Theory, grid: &Grid, prepared: &Prepared) -> Result<f64> {
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
    pub fn start(&self, family: Family, grid: &Grid, panel: usize) -> (Vec<(usize, usize)>, Columns) {
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

fn output_name(output: Output, family: Family) -> String {
    let sign = if family == Family::Plus { '+' } else { '-' };
    match output {
        Output::Gluon => "gluon".into(),
        Output::Light => format!("light{sign}"),
        Output::Heavy(flavour) => format!("{}{sign}", HEAVY_NAMES[flavour - 4]),
    }
}

fn set_units(matrix: &mut Matrix, columns: &[(usize, usize)], channel: usize) {
    for (column, (from, node)) in columns.iter().enumerate() {
        if *from == channel {
            matrix.row_mut(*node)[column] = 1.0;
        }
    }
}
