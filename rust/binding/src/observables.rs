//! Rows of structure functions at points.

use crate::arrays::{block, count, slice};
use crate::detached::run;
use crate::errors::input;
use crate::grid::Grid;
use numpy::{PyReadonlyArray1, PyReadonlyArrayDyn, PyReadwriteArrayDyn, PyUntypedArrayMethods};
use pyo3::prelude::*;
use scalewright_core::observables::{self, Factors, Part, Term};

#[pyfunction]
#[pyo3(signature = (grid, *, matrices, functions, parts, orders, f2, fl, xf3, powers, even, odd, even3, odd3, nf, out))]
#[expect(clippy::too_many_arguments, reason = "keyword arguments of Python")]
pub fn light_rows(
    py: Python<'_>,
    grid: &Grid,
    matrices: PyReadonlyArrayDyn<'_, f64>,
    functions: PyReadonlyArray1<'_, i64>,
    parts: PyReadonlyArray1<'_, i64>,
    orders: PyReadonlyArray1<'_, i64>,
    f2: PyReadonlyArrayDyn<'_, f64>,
    fl: PyReadonlyArrayDyn<'_, f64>,
    xf3: PyReadonlyArrayDyn<'_, f64>,
    powers: PyReadonlyArrayDyn<'_, f64>,
    even: PyReadonlyArrayDyn<'_, f64>,
    odd: PyReadonlyArrayDyn<'_, f64>,
    even3: PyReadonlyArrayDyn<'_, f64>,
    odd3: PyReadonlyArrayDyn<'_, f64>,
    nf: i64,
    mut out: PyReadwriteArrayDyn<'_, f64>,
) -> PyResult<()> {
    let nodes = grid.core.nodes();
    let shape = out.shape().to_vec();
    let points = shape.first().copied().unwrap_or(0);
    let expect = |name: &str, given: &[usize], expected: &[usize]| {
        if given == expected {
            return Ok(());
        }
        Err(input(py, format!("{name} has shape {given:?}: it must be {expected:?}")))
    };
    expect("out", &shape, &[points, observables::CHANNELS, nodes])?;
    let functions = slice(py, "functions", &functions)?;
    expect("matrices", matrices.shape(), &[functions.len(), nodes, nodes])?;
    for (name, nodal) in [("f2", &f2), ("fl", &fl), ("xf3", &xf3)] {
        expect(name, nodal.shape(), &[points, nodes])?;
    }
    for (name, couplings) in [("even", &even), ("odd", &odd), ("even3", &even3), ("odd3", &odd3)] {
        expect(name, couplings.shape(), &[points, observables::QUARKS])?;
    }
    let columns = powers.shape().last().copied().unwrap_or(0);
    expect("powers", powers.shape(), &[points, columns])?;
    let nf = count(py, "nf", nf)?;
    if !(1..=observables::QUARKS).contains(&nf) {
        return Err(input(py, format!("nf = {nf}: it must be from 1 to {}", observables::QUARKS)));
    }
    let (parts, orders) = (slice(py, "parts", &parts)?, slice(py, "orders", &orders)?);
    expect("parts", &[parts.len(), orders.len()], &[functions.len(), functions.len()])?;
    let values = block(py, "matrices", &matrices, 3)?;
    let mut terms = Vec::with_capacity(functions.len());
    for (i, matrix) in values.chunks_exact((nodes * nodes).max(1)).enumerate() {
        let part = usize::try_from(parts[i]).ok().and_then(|part| Part::ALL.get(part).copied());
        terms.push(Term {
            function: count(py, "functions", functions[i])?,
            part: part.ok_or_else(|| input(py, format!("parts = {}: it must be from 0 to 3", parts[i])))?,
            power: count(py, "orders", orders[i])?,
            matrix,
        });
    }
    let factors = Factors {
        nodal: [block(py, "f2", &f2, 2)?, block(py, "fl", &fl, 2)?, block(py, "xf3", &xf3, 2)?],
        powers: block(py, "powers", &powers, 2)?,
        couplings: [
            block(py, "even", &even, 2)?,
            block(py, "odd", &odd, 2)?,
            block(py, "even3", &even3, 2)?,
            block(py, "odd3", &odd3, 2)?,
        ],
        nf,
    };
    let target = out.as_slice_mut().map_err(|_| input(py, "out: the array must be C-ordered".into()))?;
    run(py, 0, None, |watch| observables::light_rows(grid.core.offsets(), &terms, &factors, target, watch))
}
