//! The finished set of operators: distinct blocks for each scale.

use super::columns::Family;
use super::inputs::{Inputs, Layout, Output};
use super::leg_columns::LegColumns;
use super::options::BuildOptions;
use super::prepared::{Prepared, carried, scale};
use super::probes;
use super::route::Route;
use crate::error::Result;
use crate::evolution::Plan;
use crate::grid::Grid;
use crate::theory::Theory;
use crate::threads::costly_first;
use crate::watch::{Stage, Watch};
use rayon::prelude::*;
use std::ops::Range;

/// Most scales interpolated together: each pass over the stored solutions serves as many.
const TOGETHER: usize = 8;
/// Scales are shared out in a multiple of so many parts.
const PARTS: usize = 4;

/// A set of operators, dense in scale along its route.
pub struct Evolution {
    pub(super) theory: Theory,
    pub(super) grid: Grid,
    /// What was asked, and how accurate its steps are; nothing where this is a derivative.
    pub(super) made: Option<(BuildOptions, Plan)>,
    pub(super) route: Route,
    pub(super) chunks: Vec<Chunk>,
    layouts: Vec<Layout>,
    /// Heavy flavours of the input.
    pub(super) heavy: Vec<usize>,
    names: Vec<String>,
    flow_names: Vec<String>,
    error: f64,
    steps: usize,
}

/// Columns that belong to one panel of input nodes: they are carried along the whole route by themselves.
pub(super) struct Chunk {
    pub(super) family: Family,
    /// Panel of the input nodes: rows of those before it are zero. The columns of each input channel, one channel after
    /// the other, and after them probes with the first panel.
    pub(super) panel: usize,
    pub(super) legs: Vec<LegColumns>,
}

/// Builds the set.
///
/// # Errors
/// [`Error::Argument`] and [`Error::Shape`] for options that are not allowed; [`Error::Tolerance`] where the steps do
/// not reach the tolerance; those of the running coupling; [`Error::Interrupted`].
///
/// [`Error::Argument`]: crate::error::Error::Argument
/// [`Error::Shape`]: crate::error::Error::Shape
/// [`Error::Tolerance`]: crate::error::Error::Tolerance
/// [`Error::Interrupted`]: crate::error::Error::Interrupted
pub fn build(theory: &Theory, grid: &Grid, options: &BuildOptions, watch: &dyn Watch) -> Result<Evolution> {
    let stages = (Stage::new(watch, 0, 2), Stage::new(watch, 1, 2));
    let made = carried(theory, grid, options, &stages.0, |prepared, inputs| {
        carry_units(theory, grid, prepared, inputs, &stages.1)
    })?;
    let (families, chunks) = made.columns;
    let inputs = made.inputs;
    Ok(Evolution {
        theory: theory.clone(),
        grid: grid.clone(),
        made: Some((options.clone(), made.plan)),
        chunks,
        layouts: inputs.layouts(&families),
        heavy: inputs.heavy.clone(),
        names: inputs.block_names(&families),
        flow_names: inputs.flow_names(&families),
        error: made.error,
        steps: made.prepared.steps(),
        route: made.prepared.route,
    })
}

/// Families, their chunks, and the errors of the chunks that hold probes.
type Units = ((Vec<Family>, Vec<Chunk>), Vec<Vec<f64>>);

/// Carries the unit columns of all families.
fn carry_units(theory: &Theory, grid: &Grid, prepared: &Prepared, inputs: &Inputs, watch: &Stage) -> Result<Units> {
    let families = inputs.families(|one, other| prepared.same(one, other));
    let tasks: Vec<(Family, usize)> =
        families.iter().flat_map(|&family| (0..grid.panels()).map(move |panel| (family, panel))).collect();
    let judged = probes::nodes(grid);
    // Columns of the pair are twice as long, and there are twice as many; all panels from the own one on act.
    let cost = |&(family, panel): &(Family, usize)| {
        let share = if family == Family::Plus { 6 } else { 1 };
        share * grid.owned(panel).len() * (grid.nodes() - grid.owned(panel).start)
    };
    let carried = costly_first(&tasks, cost, |&(family, panel)| {
        watch.check()?;
        let (start, probes) = inputs.start(family, grid, panel);
        let legs = prepared.carry(theory, &start, panel, probes)?;
        watch.one_of(tasks.len());
        let errors: Vec<f64> = legs.iter().map(|leg| leg.error(&judged)).collect();
        Ok((Chunk { family, panel, legs }, errors))
    })?;
    let (chunks, errors) = carried.into_iter().unzip();
    Ok(((families, chunks), errors))
}

impl Evolution {
    /// The same with other columns, one list of legs a chunk.
    pub(super) fn with_legs(&self, legs: Vec<Vec<LegColumns>>) -> Self {
        let with = |(chunk, legs): (&Chunk, _)| Chunk { family: chunk.family, panel: chunk.panel, legs };
        Self {
            theory: self.theory.clone(),
            grid: self.grid.clone(),
            made: None,
            route: self.route.clone(),
            chunks: self.chunks.iter().zip(legs).map(with).collect(),
            layouts: self.layouts.clone(),
            heavy: self.heavy.clone(),
            names: self.names.clone(),
            flow_names: self.flow_names.clone(),
            error: self.error,
            steps: self.steps,
        }
    }

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
    /// [`crate::error::Error::OutOfRange`] for a scale that is not on the route; [`crate::error::Error::Interrupted`].
    pub fn values(&self, asked: &[(f64, usize)], watch: &dyn Watch) -> Result<(Vec<f64>, Vec<f64>)> {
        let n = self.grid.nodes();
        let (block, flow) = (self.names.len() * n * n, self.flow_names.len() * n);
        let mut blocks = vec![0.0; asked.len() * block];
        let mut flows = vec![0.0; asked.len() * flow];
        let parts = asked.len().div_ceil(TOGETHER).next_multiple_of(PARTS).max(1);
        let together = asked.len().div_ceil(parts).max(1);
        blocks
            .par_chunks_mut((together * block).max(1))
            .zip(flows.par_chunks_mut((together * flow).max(1)))
            .zip(asked.par_chunks(together))
            .with_max_len(1)
            .try_for_each(|((blocks, flows), asked)| {
                watch.check()?;
                self.write(asked, blocks, flows)
            })?;
        Ok((blocks, flows))
    }

    /// Writes a few scales, leg by leg.
    fn write(&self, asked: &[(f64, usize)], blocks: &mut [f64], flows: &mut [f64]) -> Result<()> {
        let legs = asked.iter().map(|&(q2, nf)| self.route.leg_of(q2, nf)).collect::<Result<Vec<_>>>()?;
        let logs = asked.iter().map(|&(q2, nf)| scale(&self.theory, q2, nf)).collect::<Result<Vec<_>>>()?;
        let (block, flow) = (blocks.len() / asked.len(), flows.len() / asked.len());
        let mut room = Vec::new();
        for leg in 0..self.route.legs.len() {
            let here: Vec<usize> = (0..asked.len()).filter(|&index| legs[index] == leg).collect();
            let s: Vec<f64> = here.iter().map(|&index| logs[index]).collect();
            for chunk in &self.chunks {
                for layout in self.layouts.iter().filter(|layout| layout.family == chunk.family) {
                    for (row, &output) in layout.outputs.iter().enumerate() {
                        let owned = self.grid.owned(chunk.panel);
                        let to = Target { nodes: self.grid.nodes(), owned, layout, row };
                        chunk.legs[leg].output(output, &s, &mut room, |place, values| {
                            let index = here[place];
                            to.write_block(values, &mut blocks[index * block..(index + 1) * block]);
                            // All momentum below x_min is held with the gluon; numbers with each flavour.
                            if output == Output::Gluon || chunk.family != Family::Plus {
                                to.write_flow(values, &mut flows[index * flow..(index + 1) * flow]);
                            }
                        });
                    }
                }
            }
        }
        Ok(())
    }
}

/// Where an output of a chunk goes in blocks and flows.
struct Target<'a> {
    nodes: usize,
    /// Nodes of the input; rows before the first of them are zero.
    owned: Range<usize>,
    layout: &'a Layout,
    /// Which output.
    row: usize,
}

impl Target<'_> {
    /// Writes the rows from that of the first node owned on, but for the last.
    fn write_block(&self, values: &[f64], blocks: &mut [f64]) {
        let (n, owned) = (self.nodes, &self.owned);
        let rows = n - owned.start;
        for input in 0..self.layout.inputs {
            let first = (self.layout.first_block + self.row * self.layout.inputs + input) * n * n;
            let block = blocks[first..first + n * n].chunks_exact_mut(n).skip(owned.start);
            for (target, row) in block.zip(values.chunks_exact(values.len() / (rows + 1))) {
                target[owned.clone()].copy_from_slice(&row[input * owned.len()..(input + 1) * owned.len()]);
            }
        }
    }

    /// Writes the last row, what has flowed below `x_min`.
    fn write_flow(&self, values: &[f64], flows: &mut [f64]) {
        let (n, owned) = (self.nodes, &self.owned);
        let cols = values.len() / (n - owned.start + 1);
        let last = &values[values.len() - cols..];
        for input in 0..self.layout.inputs {
            let first = (self.layout.first_flow + self.row * self.layout.inputs + input) * n;
            let own = &last[input * owned.len()..(input + 1) * owned.len()];
            flows[first + owned.start..first + owned.end].copy_from_slice(own);
        }
    }
}
