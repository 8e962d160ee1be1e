//! What the input of a route consists of: which families and channels there are, and what they are called.

use super::columns::{Columns, Family};
use super::probes;
use super::route::Route;
use crate::evolution::{CHARM, HEAVY_NAMES, Sector};
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use std::ops::Range;

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
#[derive(Debug, Clone)]
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
    pub fn of(route: &Route, start_nf: usize, intrinsic: &[usize]) -> Self {
        let light = route.light;
        let mut heavy: Vec<usize> = (light + 1..=start_nf).chain(intrinsic.iter().copied()).collect();
        heavy.sort_unstable();
        heavy.dedup();
        let mut heavy_out: Vec<usize> = (light + 1..=route.most).chain(heavy.iter().copied()).collect();
        heavy_out.sort_unstable();
        heavy_out.dedup();
        Self { light, heavy, heavy_out }
    }

    /// Families whose operators differ from those of another.
    ///
    /// `same` says whether two sectors evolve alike along the whole route.
    pub fn families(&self, same: impl Fn(Sector, Sector) -> bool) -> Vec<Family> {
        let mut families = vec![Family::Plus, Family::NsPlus];
        if !same(Sector::NsMinus, Sector::NsPlus) {
            families.push(Family::NsMinus);
        }
        if !same(Sector::Valence, Sector::NsMinus) || !self.heavy.is_empty() {
            families.push(Family::Minus);
        }
        families
    }

    /// Names of the input channels of a family.
    fn channels(&self, family: Family) -> Vec<String> {
        let heavy = |sign: &str| -> Vec<String> {
            self.heavy.iter().map(|flavour| format!("{}{sign}", HEAVY_NAMES[flavour - CHARM])).collect()
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

    /// Unit columns of the nodes that a panel owns, one set for each input channel; those of the first panel, on which
    /// all others act, are followed by probes.
    pub fn start(&self, family: Family, grid: &Grid, panel: usize) -> (Columns, usize) {
        let owned = grid.owned(panel);
        let count = self.channels(family).len();
        let probes = if panel == 0 { probes::COUNT } else { 0 };
        let mut start = Columns::new(family, self.light, grid.nodes() + 1, count * owned.len() + probes);
        for (index, flavour) in self.heavy.iter().enumerate() {
            if matches!(family, Family::Plus | Family::Minus) {
                let mut unit = start.empty();
                set_units(&mut unit, owned.clone(), index + count - self.heavy.len());
                start.set_heavy(*flavour, unit);
            }
        }
        if family == Family::Plus {
            set_units(start.gluon_mut(), owned.clone(), 0);
        }
        set_units(start.light_mut(), owned, usize::from(family == Family::Plus));
        if probes > 0 {
            probes::fill(&mut start, grid);
        }
        (start, probes)
    }
}

fn output_name(output: Output, family: Family) -> String {
    let sign = if family == Family::Plus { '+' } else { '-' };
    match output {
        Output::Gluon => "gluon".into(),
        Output::Light => format!("light{sign}"),
        Output::Heavy(flavour) => format!("{}{sign}", HEAVY_NAMES[flavour - CHARM]),
    }
}

/// Sets the columns of an input channel.
fn set_units(matrix: &mut Matrix, owned: Range<usize>, channel: usize) {
    let first = channel * owned.len();
    for (column, node) in (first..).zip(owned) {
        matrix.row_mut(node)[column] = 1.0;
    }
}
