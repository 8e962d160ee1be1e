//! `dE/ds = A(s) E` for a block lower triangular `A`, by collocation at Chebyshev nodes, with dense output.
//!
//! On a step of length h with nodes `s_0 .. s_m` the solution is the polynomial of degree m with
//! `E_j = E_0 + (h/2) sum_k S_jk A(s_k) E_k`, S the integration matrix. This is implicit (stiff parts of A do no harm) and
//! converges geometrically in m. Row panel p depends on the panels before it alone: the system is solved panel by
//! panel. Were A constant, m/2 systems of `n_p` unknowns would give the `m n_p` unknowns of a panel
//! (`collocation`); since A moves little within a step, a few sweeps of the same on what is left of the
//! right-hand side do. What they miss falls like a power series in the change of A, faster than geometrically, by a
//! factor of some hundred to thousand in the first sweeps.

pub use super::dense::Dense;

use super::blocks::{Matrix, inverse, multiply, multiply_add, view, view_mut};
use super::chebyshev::Nodes;
use super::collocation::Collocation;
use rayon::prelude::*;
use std::cell::RefCell;
use std::ops::Range;
use std::sync::Arc;

/// Where a step leads, and how well it is done.
#[derive(Debug, Clone, Copy)]
pub struct Span {
    /// Start in s.
    pub from: f64,
    /// End in s.
    pub to: f64,
    /// Degree of the polynomials in s, at least 1.
    pub degree: usize,
    /// Number of sweeps, at least 1.
    pub sweeps: usize,
}

/// One step, ready for any start.
pub struct Step {
    nodes: Nodes,
    rule: Arc<Collocation>,
    /// Half of its length.
    half: f64,
    sweeps: usize,
    /// `A` at every node.
    generators: Vec<Matrix>,
    /// One for each row panel; none where nothing in the panel acts on the panel.
    frozen: Vec<Option<Frozen>>,
    offsets: Vec<usize>,
}

/// The equations of one panel with A as it is in the middle of the step.
struct Frozen {
    /// `(h/2) A`.
    matrix: Matrix,
    /// `(1 - t A + s^2 A^2)^-1` of each plane, h/2 in A.
    planes: Vec<Matrix>,
    /// `(1 - l A)^-1` for the eigenvalue l left over.
    single: Option<Matrix>,
}

/// Room for the panels of one solution, kept by each thread: everything is written before it is read.
#[derive(Default)]
struct Work {
    known: Vec<f64>,
    right: Vec<f64>,
    solution: Vec<f64>,
    rest: Vec<f64>,
    images: Vec<f64>,
    plane: Vec<f64>,
}

impl Step {
    /// Prepares a step.
    ///
    /// `generator(s)` is `A(s)`, block lower triangular with panels between `offsets`.
    pub fn new(span: &Span, offsets: &[usize], generator: impl Fn(f64) -> Matrix + Sync) -> Self {
        let nodes = Nodes::new(span.from, span.to, span.degree);
        let half = 0.5 * (span.to - span.from);
        let generators: Vec<Matrix> = nodes.points().par_iter().map(|&s| generator(s)).collect();
        let rule = Collocation::of(span.degree);
        let panels = offsets.par_windows(2).with_max_len(1);
        let frozen = panels.map(|own| Frozen::of(&rule, &generators, half, own[0]..own[1])).collect();
        Self { nodes, rule, half, sweeps: span.sweeps, generators, frozen, offsets: offsets.to_vec() }
    }

    /// Carries `start` over the step. Rows before panel `first` are zero and stay so.
    ///
    /// The error is estimated on the last `judged` columns.
    pub fn solve(&self, start: &Matrix, first: usize, judged: usize) -> Dense {
        let (rows, cols) = (start.rows(), start.cols());
        let m = self.rule.degree();
        let mut values = Matrix::zeros(m + 1, rows * cols);
        values.row_mut(0).copy_from_slice(start.values());
        let mut left = Matrix::zeros(rows, judged);
        WORK.with_borrow_mut(|work| {
            for panel in first..self.frozen.len() {
                let own = self.offsets[panel]..self.offsets[panel + 1];
                work.make(m, own.len() * cols);
                self.right_hand_side(&values, (rows, cols), panel, first, work);
                self.sweep(panel, cols, work, &mut left);
                let size = own.len() * cols;
                for (j, solution) in work.solution[..m * size].chunks_exact(size.max(1)).enumerate() {
                    values.row_mut(j + 1)[own.start * cols..own.end * cols].copy_from_slice(solution);
                }
            }
        });
        Dense { nodes: self.nodes.clone(), rule: Arc::clone(&self.rule), values, rows, cols, left }
    }

    /// `E_0 + (h/2) sum_k S_jk (what A_k E_k has from panels already solved)`, nodes 1..=m stacked.
    fn right_hand_side(&self, values: &Matrix, shape: (usize, usize), panel: usize, first: usize, work: &mut Work) {
        let own = self.offsets[panel]..self.offsets[panel + 1];
        let (m, n, (rows, cols)) = (self.rule.degree(), own.len(), shape);
        let size = n * cols;
        let known = &mut work.known[..(m + 1) * size];
        for (k, (generator, known)) in self.generators.iter().zip(known.chunks_exact_mut(size.max(1))).enumerate() {
            // At the start of the step the panel's own values are known as well.
            let end = if k == 0 { own.end } else { own.start };
            let solved = self.offsets[first]..end;
            let at_node = view(values.row(k), rows, cols).subrows(solved.start, solved.len());
            multiply(view_mut(known, n, cols), 1.0, generator.part(own.clone(), solved), at_node);
        }
        let right = &mut work.right[..m * size];
        for right in right.chunks_exact_mut(size.max(1)) {
            right.copy_from_slice(&values.row(0)[own.start * cols..own.end * cols]);
        }
        let integration = self.rule.integration.part(0..m, 0..m + 1);
        multiply_add(view_mut(right, m, size), self.half, integration, view(known, m + 1, size));
    }

    /// Solves one panel; what further sweeps would change in the judged columns goes to `left`.
    fn sweep(&self, panel: usize, cols: usize, work: &mut Work, left: &mut Matrix) {
        let own = self.offsets[panel]..self.offsets[panel + 1];
        let size = self.rule.degree() * own.len() * cols;
        let Some(frozen) = &self.frozen[panel] else {
            work.solution[..size].copy_from_slice(&work.right[..size]);
            return;
        };
        work.solution[..size].fill(0.0);
        work.rest[..size].copy_from_slice(&work.right[..size]);
        for sweep in 0..self.sweeps {
            if sweep > 0 {
                self.residual(own.clone(), cols, work);
            }
            frozen.solve(&self.rule, cols, work);
            for (solution, moved) in work.solution[..size].iter_mut().zip(&work.rest[..size]) {
                *solution += moved;
            }
            if left.cols() > 0 && sweep + 2 >= self.sweeps {
                judge(&work.rest[..size], own.clone(), cols, left);
            }
        }
    }

    /// What is left of the right-hand side: `b - x + (h/2) S A x`.
    fn residual(&self, own: Range<usize>, cols: usize, work: &mut Work) {
        let (m, n) = (self.rule.degree(), own.len());
        let size = n * cols;
        let blocks = work.solution.chunks_exact(size.max(1)).zip(work.images.chunks_exact_mut(size.max(1)));
        for (generator, (solution, image)) in self.generators[1..].iter().zip(blocks) {
            let acting = generator.part(own.clone(), own.clone());
            multiply(view_mut(image, n, cols), 1.0, acting, view(solution, n, cols));
        }
        let known = work.right[..m * size].iter().zip(&work.solution[..m * size]);
        for (rest, (right, solution)) in work.rest[..m * size].iter_mut().zip(known) {
            *rest = right - solution;
        }
        let integration = self.rule.integration.part(0..m, 1..m + 1);
        let images = view(&work.images[..m * size], m, size);
        multiply_add(view_mut(&mut work.rest[..m * size], m, size), self.half, integration, images);
    }
}

/// Keeps of the judged columns what a sweep moved, the most over the nodes; of the last sweep what the next ones would
/// move, from how much less it was than the one before.
fn judge(moved: &[f64], own: Range<usize>, cols: usize, left: &mut Matrix) {
    let judged = left.cols();
    for (index, row) in own.clone().enumerate() {
        for (column, left) in (cols - judged..cols).zip(left.row_mut(row)) {
            let at_nodes = moved.chunks_exact(own.len() * cols).map(|node| node[index * cols + column].abs());
            // Not the largest by comparison, which would pass over what is not a number.
            let most = at_nodes.fold(0.0, |most, value| if value <= most { most } else { value });
            *left = if *left > most { most * (most / *left) } else { most };
        }
    }
}

impl Frozen {
    fn of(rule: &Collocation, generators: &[Matrix], half: f64, own: Range<usize>) -> Option<Self> {
        let n = own.len();
        let block = |generator: &Matrix| -> Vec<f64> {
            own.clone().flat_map(|row| generator.row(row)[own.clone()].iter().map(|a| half * a)).collect()
        };
        if generators.iter().all(|generator| block(generator).iter().all(|a| *a == 0.0)) {
            return None;
        }
        let matrix = Matrix::from_values(n, n, block(&generators[generators.len() / 2]));
        let mut square = Matrix::zeros(n, n);
        multiply(square.part_mut(0..n, 0..n), 1.0, matrix.part(0..n, 0..n), matrix.part(0..n, 0..n));
        let inverted = |linear: f64, quadratic: f64| {
            let mut sum = Matrix::identity(n);
            sum.add_scaled(-linear, &matrix);
            sum.add_scaled(quadratic, &square);
            inverse(&sum)
        };
        let planes = rule.planes.iter().map(|&(t, s)| inverted(t, s * s)).collect();
        let single = rule.single.map(|value| inverted(value, 0.0));
        Some(Self { matrix, planes, single })
    }

    /// Replaces the right-hand side in `work.rest` by the solution with constant A.
    fn solve(&self, rule: &Collocation, cols: usize, work: &mut Work) {
        let (m, n) = (rule.degree(), self.matrix.rows());
        let size = n * cols;
        let all = 0..n;
        let matrix = self.matrix.part(all.clone(), all.clone());
        let images = &mut work.images[..m * size];
        let to_planes = rule.to_planes.part(0..m, 0..m);
        multiply(view_mut(images, m, size), 1.0, to_planes, view(&work.rest[..m * size], m, size));
        let plane = &mut work.plane[..size];
        let pairs = self.planes.len() * 2 * size;
        let inverses = self.planes.iter().zip(&rule.planes);
        for ((inverse, &(_, s)), both) in inverses.zip(images[..pairs].chunks_exact_mut(2 * size)) {
            let (first, second) = both.split_at_mut(size);
            multiply_add(view_mut(second, n, cols), s, matrix, view(first, n, cols));
            multiply(view_mut(plane, n, cols), 1.0, inverse.part(all.clone(), all.clone()), view(second, n, cols));
            multiply_add(view_mut(first, n, cols), -s, matrix, view(plane, n, cols));
            second.copy_from_slice(plane);
        }
        if let Some(inverse) = &self.single {
            let last = &mut images[pairs..];
            multiply(view_mut(plane, n, cols), 1.0, inverse.part(all.clone(), all.clone()), view(last, n, cols));
            last.copy_from_slice(plane);
        }
        let from_planes = rule.from_planes.part(0..m, 0..m);
        multiply(view_mut(&mut work.rest[..m * size], m, size), 1.0, from_planes, view(images, m, size));
    }
}

impl Work {
    /// Makes room for the nodes of a panel, `size` values each.
    fn make(&mut self, degree: usize, size: usize) {
        for buffer in [&mut self.known, &mut self.right, &mut self.solution, &mut self.rest, &mut self.images] {
            buffer.resize(buffer.len().max((degree + 1) * size), 0.0);
        }
        self.plane.resize(self.plane.len().max(size), 0.0);
    }
}

thread_local! {
    static WORK: RefCell<Work> = RefCell::default();
}
