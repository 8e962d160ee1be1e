//! Builds, live sets of operators, and what they are applied to.

use crate::arrays::{block, count, handed_over, slice};
use crate::detached::run;
use crate::errors::input;
use crate::grid::Grid;
use crate::kernels::channel;
use crate::sensitivity::direction;
use crate::theory::Theory;
use numpy::{PyArrayDyn, PyReadonlyArray1, PyReadonlyArrayDyn, PyReadwriteArrayDyn, PyUntypedArrayMethods};
use pyo3::prelude::*;
use scalewright_core::apply as core_apply;
use scalewright_core::convolution::convolve_values;
use scalewright_core::evolution::FurtherKernel;
use scalewright_core::numerics::blocks::Matrix;
use scalewright_core::observables as core_observables;
use scalewright_core::thresholds::{self, BuildOptions};

/// A live set, dense in scale along its route.
#[pyclass(frozen, module = "scalewright._core")]
pub struct Evolution {
    core: thresholds::Evolution,
    nodes: usize,
}

/// An array of any number of axes.
type Array = Py<PyArrayDyn<f64>>;

/// A kernel of the user: order, nf, channel, regular values, plus coefficients, local part.
type Further<'py> = (i64, i64, String, PyReadonlyArray1<'py, f64>, PyReadonlyArray1<'py, f64>, f64);

/// The same with its data taken over.
type OwnedKernel = (usize, usize, scalewright_core::kernels::splitting::Channel, Vec<f64>, Vec<f64>, f64);

#[pyfunction]
#[pyo3(signature = (theory, grid, *, start_q2, start_nf, q2, nf, intrinsic, tolerance, threads, further, progress))]
#[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
pub fn build(
    py: Python<'_>,
    theory: &Bound<'_, Theory>,
    grid: &Bound<'_, Grid>,
    start_q2: f64,
    start_nf: i64,
    q2: PyReadonlyArray1<'_, f64>,
    nf: PyReadonlyArray1<'_, i64>,
    intrinsic: Vec<i64>,
    tolerance: f64,
    threads: i64,
    further: Vec<Further<'_>>,
    progress: Option<Py<PyAny>>,
) -> PyResult<Evolution> {
    let asked = scales(py, &q2, &nf)?;
    let intrinsic = intrinsic.into_iter().map(|flavour| count(py, "intrinsic", flavour)).collect::<PyResult<_>>()?;
    let own: Vec<OwnedKernel> = further.iter().map(|kernel| taken_over(py, kernel)).collect::<PyResult<_>>()?;
    let (theory, grid) = (&theory.get().core, &grid.get().core);
    let start_nf = count(py, "start_nf", start_nf)?;
    let core = run(py, count(py, "threads", threads)?, progress.as_ref(), move |watch| {
        let further = own
            .into_iter()
            .map(|(order, nf, channel, regular, plus, local)| {
                let kernel = convolve_values(grid, &regular, &plus, local, watch)?;
                Ok(FurtherKernel { order, nf, channel, kernel })
            })
            .collect::<scalewright_core::error::Result<_>>()?;
        let options = BuildOptions { start_q2, start_nf, asked, intrinsic, tolerance, further };
        thresholds::build(theory, grid, &options, watch)
    })?;
    Ok(Evolution { core, nodes: grid.nodes() })
}

fn taken_over(py: Python<'_>, kernel: &Further<'_>) -> PyResult<OwnedKernel> {
    let (order, nf, name, regular, plus, local) = kernel;
    Ok((
        count(py, "order", *order)?,
        count(py, "nf", *nf)?,
        channel(py, name)?,
        slice(py, "regular", regular)?.to_vec(),
        slice(py, "plus", plus)?.to_vec(),
        *local,
    ))
}

fn scales(
    py: Python<'_>,
    q2: &PyReadonlyArray1<'_, f64>,
    nf: &PyReadonlyArray1<'_, i64>,
) -> PyResult<Vec<(f64, usize)>> {
    let (q2, nf) = (slice(py, "q2", q2)?, slice(py, "nf", nf)?);
    if q2.len() != nf.len() {
        return Err(input(py, format!("q2 has {} entries, nf {}: equal numbers", q2.len(), nf.len())));
    }
    q2.iter().zip(nf).map(|(&q2, &nf)| Ok((q2, count(py, "nf", nf)?))).collect()
}

#[pymethods]
impl Evolution {
    #[getter]
    fn names(&self) -> Vec<String> {
        self.core.names().to_vec()
    }

    #[getter]
    fn light(&self) -> usize {
        self.core.light()
    }

    #[getter]
    fn flow_names(&self) -> Vec<String> {
        self.core.flow_names().to_vec()
    }

    #[getter]
    fn error(&self) -> f64 {
        self.core.error()
    }

    #[getter]
    fn steps(&self) -> usize {
        self.core.steps()
    }

    fn ranges(&self) -> Vec<(usize, f64, f64)> {
        self.core.ranges()
    }

    /// Blocks (scale, block, node, node) and flows (scale, flow, node).
    fn values(
        &self,
        py: Python<'_>,
        q2: PyReadonlyArray1<'_, f64>,
        nf: PyReadonlyArray1<'_, i64>,
        threads: i64,
    ) -> PyResult<(Array, Array)> {
        let asked = scales(py, &q2, &nf)?;
        let count_scales = asked.len();
        let (blocks, flows) =
            run(py, count(py, "threads", threads)?, None, move |watch| self.core.values(&asked, watch))?;
        let shape = [count_scales, self.core.names().len(), self.nodes, self.nodes];
        let flow_shape = [count_scales, self.core.flow_names().len(), self.nodes];
        Ok((handed_over(py, &shape, blocks)?, handed_over(py, &flow_shape, flows)?))
    }

    /// The derivative with respect to a parameter, served as the set itself.
    fn derivative(&self, py: Python<'_>, parameter: &str, threads: i64) -> PyResult<Self> {
        let direction = direction(py, parameter)?;
        let core = run(py, count(py, "threads", threads)?, None, move |watch| self.core.derivative(direction, watch))?;
        Ok(Self { core, nodes: self.nodes })
    }

    /// Rows (point, 13, node) at scales of points, carried back to the input: rows `places` of out (row, flavour, node).
    #[pyo3(signature = (rows, *, q2, nf, scale_of, protons, flavours, places, out, threads))]
    #[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
    fn pull_back(
        &self,
        py: Python<'_>,
        rows: PyReadonlyArrayDyn<'_, f64>,
        q2: PyReadonlyArray1<'_, f64>,
        nf: PyReadonlyArray1<'_, i64>,
        scale_of: PyReadonlyArray1<'_, i64>,
        protons: PyReadonlyArray1<'_, f64>,
        flavours: PyReadonlyArray1<'_, i64>,
        places: PyReadonlyArray1<'_, i64>,
        mut out: PyReadwriteArrayDyn<'_, f64>,
        threads: i64,
    ) -> PyResult<()> {
        let asked = scales(py, &q2, &nf)?;
        let (points, shape) = (rows.shape().first().copied().unwrap_or(0), out.shape().to_vec());
        let expected = [points, core_observables::CHANNELS, self.nodes];
        if rows.shape() != expected {
            return Err(input(py, format!("rows has shape {:?}: it must be {expected:?}", rows.shape())));
        }
        let (flavours, protons) = (slice(py, "flavours", &flavours)?, slice(py, "protons", &protons)?);
        let indices = |name, array: &PyReadonlyArray1<'_, i64>| -> PyResult<Vec<usize>> {
            slice(py, name, array)?.iter().map(|&value| count(py, name, value)).collect()
        };
        let (scale_of, places) = (indices("scale_of", &scale_of)?, indices("places", &places)?);
        if [protons.len(), scale_of.len(), places.len()] != [points; 3]
            || shape.get(1..) != Some(&[flavours.len(), self.nodes][..])
        {
            let message = format!("scale_of, protons and places must have {points} entries, out {shape:?} must fit");
            return Err(input(py, message));
        }
        let batch = core_observables::Batch {
            rows: block(py, "rows", &rows, 3)?,
            scales: &asked,
            scale_of: &scale_of,
            protons,
            flavours,
            places: &places,
        };
        let target = out.as_slice_mut().map_err(|_| input(py, "out: the array must be C-ordered".into()))?;
        run(py, count(py, "threads", threads)?, None, |watch| {
            core_observables::pull_back(&self.core, &batch, target, watch)
        })
    }
}

#[pyfunction]
#[pyo3(signature = (*, names, light, values, densities, in_flavours, out_flavours, out, threads))]
#[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
pub fn apply(
    py: Python<'_>,
    names: Vec<String>,
    light: i64,
    values: PyReadonlyArrayDyn<'_, f64>,
    densities: PyReadonlyArrayDyn<'_, f64>,
    in_flavours: PyReadonlyArray1<'_, i64>,
    out_flavours: PyReadonlyArray1<'_, i64>,
    mut out: PyReadwriteArrayDyn<'_, f64>,
    threads: i64,
) -> PyResult<()> {
    let (blocks_shape, input_shape) = (values.shape().to_vec(), densities.shape().to_vec());
    let (block_values, input_values) = (block(py, "values", &values, 4)?, block(py, "densities", &densities, 3)?);
    let (inputs, outputs) = (slice(py, "in_flavours", &in_flavours)?, slice(py, "out_flavours", &out_flavours)?);
    let expected = [blocks_shape[0], input_shape[0], outputs.len(), blocks_shape[3]];
    if out.shape() != expected {
        return Err(input(py, format!("out has shape {:?}: it must be {expected:?}", out.shape())));
    }
    if blocks_shape[1] != names.len() || input_shape[1] != inputs.len() || input_shape[2] != blocks_shape[3] {
        return Err(input(py, format!("shapes of values {blocks_shape:?} and densities {input_shape:?} do not fit")));
    }
    let set = core_apply::Blocks::new(&names, count(py, "light", light)?)
        .map_err(|error| crate::errors::exception(py, &error))?;
    let target = out.as_slice_mut().map_err(|_| input(py, "out: the array must be C-ordered".into()))?;
    let batch = core_apply::Batch {
        blocks: &set,
        block_count: names.len(),
        values: block_values,
        nodes: blocks_shape[3],
        densities: input_values,
        in_flavours: inputs,
        out_flavours: outputs,
    };
    run(py, count(py, "threads", threads)?, None, move |watch| core_apply::apply(&batch, target, watch))
}

#[pyfunction]
#[pyo3(signature = (*, first_names, first_light, first_values, second_names, second_light, second_values))]
pub fn compose(
    py: Python<'_>,
    first_names: Vec<String>,
    first_light: i64,
    first_values: PyReadonlyArrayDyn<'_, f64>,
    second_names: Vec<String>,
    second_light: i64,
    second_values: PyReadonlyArrayDyn<'_, f64>,
) -> PyResult<(Vec<String>, usize, Py<PyArrayDyn<f64>>)> {
    let nodes = first_values.shape().last().copied().unwrap_or(0);
    let size = nodes * nodes;
    let (before, after) =
        (block(py, "first_values", &first_values, 3)?, block(py, "second_values", &second_values, 4)?);
    let fits = first_values.shape() == [first_names.len(), nodes, nodes]
        && second_values.shape()[1..] == [second_names.len(), nodes, nodes];
    if !fits {
        let (first, second) = (first_values.shape(), second_values.shape());
        return Err(input(py, format!("shapes of first_values {first:?} and second_values {second:?} do not fit")));
    }
    let named = |names: &[String], light: i64| {
        let light = count(py, "light", light)?;
        core_apply::Blocks::new(names, light).map_err(|error| crate::errors::exception(py, &error))
    };
    let matrices = |values: &[f64]| -> Vec<Matrix> {
        values.chunks_exact(size).map(|values| Matrix::from_values(nodes, nodes, values.to_vec())).collect()
    };
    let first = core_apply::Set { blocks: named(&first_names, first_light)?, values: matrices(before) };
    let blocks = named(&second_names, second_light)?;
    let second: Vec<core_apply::Set> = after
        .chunks_exact((size * second_names.len()).max(1))
        .map(|values| core_apply::Set { blocks: blocks.clone(), values: matrices(values) })
        .collect();
    let (names, light, values) = run(py, 0, None, |_| core_apply::compose(&first, &second))?;
    let shape = [values.len(), names.len(), nodes, nodes];
    let values =
        values.iter().flatten().flat_map(scalewright_core::numerics::blocks::Matrix::values).copied().collect();
    Ok((names, light, handed_over(py, &shape, values)?))
}

/// Values (scale, replica, flavour, node), and what has gone below `x_min`: momentum (scale, replica) and number
/// (scale, replica, quark).
#[pyfunction]
#[pyo3(signature = (theory, grid, *, start_q2, start_nf, densities, in_flavours, q2, nf, out_flavours, tolerance, threads))]
#[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
pub fn evolve(
    py: Python<'_>,
    theory: &Bound<'_, Theory>,
    grid: &Bound<'_, Grid>,
    start_q2: f64,
    start_nf: i64,
    densities: PyReadonlyArrayDyn<'_, f64>,
    in_flavours: PyReadonlyArray1<'_, i64>,
    q2: PyReadonlyArray1<'_, f64>,
    nf: PyReadonlyArray1<'_, i64>,
    out_flavours: PyReadonlyArray1<'_, i64>,
    tolerance: f64,
    threads: i64,
) -> PyResult<(Array, Array, Array)> {
    let asked = scales(py, &q2, &nf)?;
    let shape = densities.shape().to_vec();
    let values = block(py, "densities", &densities, 3)?;
    let (inputs, outputs) = (slice(py, "in_flavours", &in_flavours)?, slice(py, "out_flavours", &out_flavours)?);
    let (theory, grid) = (&theory.get().core, &grid.get().core);
    if shape[1] != inputs.len() || shape[2] != grid.nodes() {
        let expected = [inputs.len(), grid.nodes()];
        return Err(input(py, format!("densities has shape {shape:?}: after the replicas it must be {expected:?}")));
    }
    let start_nf = count(py, "start_nf", start_nf)?;
    let heavy = |flavour: &i64| (1..=6).contains(&flavour.abs()) && flavour.unsigned_abs() as usize > start_nf;
    let intrinsic = inputs.iter().filter(|flavour| heavy(flavour)).map(|flavour| flavour.unsigned_abs() as usize);
    let options =
        BuildOptions { start_q2, start_nf, asked, intrinsic: intrinsic.collect(), tolerance, further: vec![] };
    let vectors = thresholds::Vectors { in_flavours: inputs, values, out_flavours: outputs };
    let (scales, replicas) = (options.asked.len(), shape[0]);
    let found = run(py, count(py, "threads", threads)?, None, |watch| {
        thresholds::evolve(theory, grid, &options, &vectors, watch)
    })?;
    Ok((
        handed_over(py, &[scales, replicas, outputs.len(), grid.nodes()], found.values)?,
        handed_over(py, &[scales, replicas], found.momentum)?,
        handed_over(py, &[scales, replicas, 6], found.number)?,
    ))
}
