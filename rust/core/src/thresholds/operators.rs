//! The finished set of operators: distinct blocks for each scale.

use super::columns::{Columns, Family, LegColumns};
use super::inputs::{Inputs, Layout, Output};
use super::options::BuildOptions;
use super::prepared::{Prepared, prepare, scale};
use super::route::Route;
use crate::error::Result;
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use crate::watch::{Stage, Watch};
use rayon::prelude::*;

/// Scales interpolated together: each pass over the stored solutions serves as many.
const TOGETHER: usize = 8;

/// A set of operators, dense in scale along its route.
pub struct Evolution {
    pub(super) theory: Theory,
    pub(super) grid: Grid,
    /// What was asked; nothing where this is a derivative.
    pub(super) options: Option<BuildOptions>,
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
    /// Panel of the input nodes: rows of those before it are zero.
    pub(super) panel: usize,
    /// `(input channel, input node)` of each column.
    pub(super) columns: Vec<(usize, usize)>,
    pub(super) legs: Vec<LegColumns>,
}

impl Chunk {
    fn with_legs(&self, legs: Vec<LegColumns>) -> Self {
        Self { family: self.family, panel: self.panel, columns: self.columns.clone(), legs }
    }
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
    let (prepared, inputs, error) = prepare(theory, grid, options, &Stage::new(watch, 0, 2))?;
    finish(theory, grid, options, prepared, &inputs, error, &Stage::new(watch, 1, 2))
}

/// Carries the unit columns of all families.
fn finish(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    prepared: Prepared,
    inputs: &Inputs,
    error: f64,
    watch: &Stage,
) -> Result<Evolution> {
    let families = inputs.families(|one, other| prepared.same(one, other));
    let tasks: Vec<(Family, usize)> =
        families.iter().flat_map(|&family| (0..grid.panels()).map(move |panel| (family, panel))).collect();
    let chunks: Vec<Chunk> = tasks
        .par_iter()
        .map(|&(family, panel)| {
            watch.check()?;
            let (columns, start) = inputs.start(family, grid, panel);
            let legs = prepared.carry(theory, &start, panel)?;
            watch.one_of(tasks.len());
            Ok(Chunk { family, panel, columns, legs })
        })
        .collect::<Result<_>>()?;
    Ok(Evolution {
        theory: theory.clone(),
        grid: grid.clone(),
        options: Some(options.clone()),
        chunks,
        layouts: inputs.layouts(&families),
        heavy: inputs.heavy.clone(),
        names: inputs.block_names(&families),
        flow_names: inputs.flow_names(&families),
        error,
        steps: prepared.steps(),
        route: prepared.route,
    })
}

impl Evolution {
    /// The same with other columns, one list of legs a chunk.
    pub(super) fn with_legs(&self, legs: Vec<Vec<LegColumns>>) -> Self {
        let chunks = self.chunks.iter().zip(legs).map(|(chunk, legs)| chunk.with_legs(legs)).collect();
        Self {
            theory: self.theory.clone(),
            grid: self.grid.clone(),
            options: None,
            route: self.route.clone(),
            chunks,
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
        blocks
            .par_chunks_mut((TOGETHER * block).max(1))
            .zip(flows.par_chunks_mut((TOGETHER * flow).max(1)))
            .zip(asked.par_chunks(TOGETHER))
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
        for leg in 0..self.route.legs.len() {
            let here: Vec<usize> = (0..asked.len()).filter(|&index| legs[index] == leg).collect();
            let s: Vec<f64> = here.iter().map(|&index| logs[index]).collect();
            for chunk in &self.chunks {
                for (columns, &index) in chunk.legs[leg].at_many(&s).iter().zip(&here) {
                    let blocks = &mut blocks[index * block..(index + 1) * block];
                    self.scatter(chunk, columns, blocks, &mut flows[index * flow..(index + 1) * flow]);
                }
            }
        }
        Ok(())
    }

    /// Writes the columns of a chunk to their places.
    fn scatter(&self, chunk: &Chunk, columns: &Columns, blocks: &mut [f64], flows: &mut [f64]) {
        let n = self.grid.nodes();
        for layout in self.layouts.iter().filter(|layout| layout.family == chunk.family) {
            for (index, &output) in layout.outputs.iter().enumerate() {
                let matrix = match output {
                    Output::Gluon => Some(columns.gluon()),
                    Output::Light => Some(columns.light_sum()),
                    Output::Heavy(flavour) => columns.heavy(flavour),
                };
                let Some(matrix) = matrix else { continue };
                let first = layout.first_block + index * layout.inputs;
                for i in 0..n {
                    for (&(channel, node), value) in chunk.columns.iter().zip(matrix.row(i)) {
                        blocks[((first + channel) * n + i) * n + node] = *value;
                    }
                }
                // All momentum below x_min is held with the gluon; numbers with each flavour.
                if output == Output::Gluon || chunk.family != Family::Plus {
                    scatter_flow(chunk, layout.first_flow + index * layout.inputs, matrix, n, flows);
                }
            }
        }
    }
}

/// Writes the last row, what has flowed below `x_min`.
fn scatter_flow(chunk: &Chunk, first: usize, matrix: &Matrix, n: usize, flows: &mut [f64]) {
    for (&(channel, node), value) in chunk.columns.iter().zip(matrix.row(n)) {
        flows[(first + channel) * n + node] = *value;
    }
}
