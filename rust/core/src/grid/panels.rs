//! Panels, nodes and presets of a grid.

use crate::error::{Error, Result};
use crate::numerics::chebyshev::Nodes;

/// A grid: panels in `u = ln(1/x)` from `u = 0`, Chebyshev nodes in each, neighbours sharing a node.
///
/// The node at `x = 1` is not held, since every density vanishes there. Nodes are ordered by growing `u`, so that
/// a convolution (which needs only larger x) is block lower triangular: panel `p` owns the nodes
/// `self.owned(p)`, its left boundary belongs to the panel before.
#[derive(Debug, Clone, PartialEq)]
pub struct Grid {
    edges: Vec<f64>,
    degrees: Vec<usize>,
    panels: Vec<Nodes>,
    offsets: Vec<usize>,
    u: Vec<f64>,
}

/// Named resolutions of a preset grid.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Resolution {
    /// At most 72 nodes at `x_min = 1e-7`.
    Standard,
    /// At most 110 nodes at `x_min = 1e-7`.
    Fine,
}

impl Resolution {
    /// Inner edges in u and, for each panel, the degree; that of the last panel holds at `x_min = 1e-7`.
    ///
    /// Found by trial on random `x^a (1-x)^b (1 + c sqrt x + d x)`, a from -0.4 to 0.8, b from 1.5 to 10, x <= 0.9, and
    /// on the published benchmark input after evolution; `benches/accuracy.py` shows what they reach.
    fn panels(self) -> (&'static [f64], &'static [usize]) {
        match self {
            Self::Standard => (&[0.0, 0.107, 0.90, 6.47], &[14, 19, 21, 17]),
            Self::Fine => (&[0.0, 0.02, 0.25, 1.2, 6.47], &[12, 22, 22, 28, 24]),
        }
    }
}

/// Length of the last panel for which [`Resolution::panels`] holds: from 6.47 to `ln(1e7)`.
const LAST_PANEL: f64 = 9.65;
/// Below this length the last panel is merged into the one before.
const SHORTEST_LAST_PANEL: f64 = 1.5;
/// Largest number of nodes of a free grid: a build needs memory that grows with its square.
const MOST_NODES: usize = 400;
/// Largest degree of a panel: beyond it the barycentric weights lose digits.
const LARGEST_DEGREE: usize = 64;

impl Grid {
    /// A grid with free panels: `edges` in u from 0, growing; one polynomial degree for each panel.
    ///
    /// # Errors
    /// [`Error::Argument`] where the edges do not start at 0 or do not grow, a degree is not in 2..=64, the
    /// numbers do not fit together, or there are more than 400 nodes.
    pub fn new(edges: &[f64], degrees: &[usize]) -> Result<Self> {
        check(edges, degrees)?;
        let panels: Vec<Nodes> =
            edges.windows(2).zip(degrees).map(|(edge, &degree)| Nodes::new(edge[0], edge[1], degree)).collect();
        let mut offsets = vec![0];
        let mut u = Vec::new();
        for panel in &panels {
            u.extend_from_slice(&panel.points()[1..]);
            offsets.push(u.len());
        }
        Ok(Self { edges: edges.to_vec(), degrees: degrees.to_vec(), panels, offsets, u })
    }

    /// The preset grid down to `x_min`, from 1e-9 to 1e-2.
    ///
    /// # Errors
    /// [`Error::Argument`] for another `x_min`.
    pub fn preset(x_min: f64, resolution: Resolution) -> Result<Self> {
        if !(1e-9..=1e-2).contains(&x_min) {
            return Err(Error::Argument {
                name: "x_min",
                value: format!("{x_min:?}"),
                allowed: "must lie in [1e-09, 0.01]; use free panels for another".into(),
            });
        }
        let u_max = -x_min.ln();
        let (inner, degrees) = resolution.panels();
        let (mut edges, mut degrees) = (inner.to_vec(), degrees.to_vec());
        let last = degrees.len() - 1;
        let length = u_max - edges[last];
        if length < SHORTEST_LAST_PANEL {
            edges.pop();
            degrees.pop();
        } else {
            let scaled = degrees[last] as f64 * (length / LAST_PANEL).powf(0.7);
            degrees[last] = (scaled.round() as usize).max(degrees[last] / 2);
        }
        edges.push(u_max);
        Self::new(&edges, &degrees)
    }

    /// Edges of the panels in u.
    pub fn edges(&self) -> &[f64] {
        &self.edges
    }

    /// Polynomial degree of each panel.
    pub fn degrees(&self) -> &[usize] {
        &self.degrees
    }

    /// `u = ln(1/x)` of the nodes, growing.
    pub fn u(&self) -> &[f64] {
        &self.u
    }

    /// Number of nodes.
    pub fn nodes(&self) -> usize {
        self.u.len()
    }

    /// Smallest x: `e^-u` of the last edge without the rounding of its last digits, so that a grid made with
    /// `x_min = 1e-7` says 1e-7.
    pub fn x_min(&self) -> f64 {
        let x = (-self.u_max()).exp();
        format!("{x:.13e}").parse().unwrap_or(x)
    }

    /// x of the nodes, falling to `x_min`.
    pub fn x(&self) -> Vec<f64> {
        let mut x: Vec<f64> = self.u.iter().map(|u| (-u).exp()).collect();
        if let Some(last) = x.last_mut() {
            *last = self.x_min();
        }
        x
    }

    /// Largest u.
    pub fn u_max(&self) -> f64 {
        self.edges[self.edges.len() - 1]
    }

    /// Number of panels.
    pub fn panels(&self) -> usize {
        self.panels.len()
    }

    /// The Chebyshev nodes of a panel, both ends included.
    pub fn panel(&self, panel: usize) -> &Nodes {
        &self.panels[panel]
    }

    /// Nodes that a panel owns: all of its own but the one at its left edge.
    pub fn owned(&self, panel: usize) -> std::ops::Range<usize> {
        self.offsets[panel]..self.offsets[panel + 1]
    }

    /// The panel that owns node `i`.
    pub fn panel_of(&self, i: usize) -> usize {
        self.offsets.partition_point(|&offset| offset <= i) - 1
    }

    /// Where the panels begin in the list of nodes, and the number of nodes at the end.
    pub fn offsets(&self) -> &[usize] {
        &self.offsets
    }
}

fn check(edges: &[f64], degrees: &[usize]) -> Result<()> {
    let argument = |name, value, allowed: &str| Error::Argument { name, value, allowed: allowed.into() };
    if edges.len() < 2 || edges.len() != degrees.len() + 1 {
        return Err(argument(
            "edges",
            format!("{} edges for {} degrees", edges.len(), degrees.len()),
            "there must be one more edge than degrees, and one panel at least",
        ));
    }
    if edges[0] != 0.0 || edges.windows(2).any(|edge| edge[0] >= edge[1]) || edges.iter().any(|e| !e.is_finite()) {
        return Err(argument("edges", format!("{edges:?}"), "must grow from 0 (u = ln(1/x))"));
    }
    if degrees.iter().any(|degree| !(2..=LARGEST_DEGREE).contains(degree)) {
        return Err(argument("degrees", format!("{degrees:?}"), "each must lie in 2..=64"));
    }
    let nodes: usize = degrees.iter().sum();
    if nodes > MOST_NODES {
        return Err(argument("degrees", format!("{nodes} nodes"), "at most 400 nodes in all"));
    }
    Ok(())
}
