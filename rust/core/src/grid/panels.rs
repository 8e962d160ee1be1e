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
    /// Degrees of the panels near x = 1, of the middle panel, and of the last panel at `x_min = 1e-7`.
    ///
    /// Found by trial on the published benchmark input; `benches/accuracy.py` shows how sharp they are.
    fn degrees(self) -> [usize; 4] {
        match self {
            Self::Standard => [14, 19, 22, 16],
            Self::Fine => [22, 30, 32, 24],
        }
    }
}

/// Edges in u shared by all presets, before the last one at `ln(1/x_min)`. Found by trial: short near x = 1, where
/// a density falls over many decades.
const EDGES: [f64; 4] = [0.0, 0.107, 0.90, 6.47];
/// Length of the last panel for which [`Resolution::degrees`] holds.
const LAST_PANEL: f64 = 9.63;
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
        let mut edges = EDGES.to_vec();
        let mut degrees = resolution.degrees().to_vec();
        let length = u_max - EDGES[3];
        if length < SHORTEST_LAST_PANEL {
            edges.pop();
            degrees.pop();
        } else {
            let scaled = degrees[3] as f64 * (length / LAST_PANEL).powf(0.7);
            degrees[3] = (scaled.round() as usize).max(degrees[3] / 2);
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

    /// Smallest x.
    pub fn x_min(&self) -> f64 {
        (-self.u_max()).exp()
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
