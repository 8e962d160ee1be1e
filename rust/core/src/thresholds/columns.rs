//! Some columns of the operators (or some densities): what became of them at one scale, flavour by flavour.
//!
//! Flavours 1 to `light` act alike along the whole route and are held as one sum; differences among them evolve in
//! families of their own. Each matrix has one row a node and a last row: what has flowed below `x_min` (all of the
//! momentum in that of the gluon, each flavour's own number elsewhere).

use crate::evolution::{CHARM, Sector, place};
use crate::numerics::blocks::Matrix;

/// Gluon, light sum, charm, bottom, top.
pub const CHANNELS: usize = 5;
/// Their places.
pub const GLUON_PLACE: usize = 0;
pub const LIGHT_PLACE: usize = 1;
pub const CHARM_PLACE: usize = 2;

/// What kind of combination the columns belong to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Family {
    /// Gluon and sums `q + qbar`.
    Plus,
    /// Sums over flavours of `q - qbar`.
    Minus,
    /// Differences among the light `q + qbar`.
    NsPlus,
    /// Differences among the light `q - qbar`.
    NsMinus,
}

/// Values of some columns at one scale.
#[derive(Debug, Clone)]
pub struct Columns {
    /// Their family.
    pub family: Family,
    pub light: usize,
    pub channels: [Option<Matrix>; CHANNELS],
}

/// What evolves alone, each with its equations: the part that holds all flavours, and side by side each active heavy
/// flavour less its share of the light sum.
pub type Combinations = ((Sector, Matrix), Option<(Sector, Matrix)>);

impl Columns {
    /// Columns with nothing in them: `rows` with the last one for what flows below `x_min`.
    pub fn new(family: Family, light: usize, rows: usize, cols: usize) -> Self {
        let mut channels = [const { None }; CHANNELS];
        channels[LIGHT_PLACE] = Some(Matrix::zeros(rows, cols));
        if family == Family::Plus {
            channels[GLUON_PLACE] = Some(Matrix::zeros(rows, cols));
        }
        Self { family, light, channels }
    }

    /// The gluon, for the plus family alone.
    pub fn gluon(&self) -> &Matrix {
        // Set by the constructors of the plus family and never removed; others have none and are not asked.
        self.channels[GLUON_PLACE].as_ref().expect("the plus family holds a gluon")
    }

    /// The gluon, for the plus family alone.
    pub fn gluon_mut(&mut self) -> &mut Matrix {
        self.channel_mut(GLUON_PLACE)
    }

    /// The sum of the light flavours; for a non-singlet family the only content.
    pub fn light_sum(&self) -> &Matrix {
        // Set by the constructors and never removed.
        self.channels[LIGHT_PLACE].as_ref().expect("every family holds the light channel")
    }

    /// The sum of the light flavours; for a non-singlet family the only content.
    pub fn light_mut(&mut self) -> &mut Matrix {
        self.channel_mut(LIGHT_PLACE)
    }

    /// A flavour that is heavier than the light ones.
    pub fn heavy(&self, flavour: usize) -> Option<&Matrix> {
        self.channels[flavour - CHARM + CHARM_PLACE].as_ref()
    }

    /// A flavour that is heavier than the light ones.
    pub fn heavy_mut(&mut self, flavour: usize) -> Option<&mut Matrix> {
        self.channels[flavour - CHARM + CHARM_PLACE].as_mut()
    }

    /// Puts a heavy flavour in its place.
    pub fn set_heavy(&mut self, flavour: usize, values: Matrix) {
        self.channels[flavour - CHARM + CHARM_PLACE] = Some(values);
    }

    /// The lightest flavour that is held by itself.
    pub fn lightest_heavy(&self) -> usize {
        self.light + 1
    }

    /// Zeros of the same shape.
    pub fn empty(&self) -> Matrix {
        Matrix::zeros(self.light_sum().rows(), self.light_sum().cols())
    }

    /// The sum of the first nf flavours.
    pub fn singlet(&self, nf: usize) -> Matrix {
        let mut sum = self.light_sum().clone();
        for flavour in self.lightest_heavy()..=nf {
            if let Some(heavy) = self.heavy(flavour) {
                sum.add_scaled(1.0, heavy);
            }
        }
        sum
    }

    /// Heavy flavours that are active at nf; none in families of differences.
    pub fn active(&self, nf: usize) -> Vec<usize> {
        let held_alone = matches!(self.family, Family::Plus | Family::Minus);
        (self.lightest_heavy()..=nf).filter(|_| held_alone).collect()
    }

    /// What evolves alone at nf.
    pub fn combinations(&self, nf: usize, offsets: &[usize]) -> Combinations {
        let (sum, difference) = match self.family {
            Family::Plus => (Sector::Singlet, Sector::NsPlus),
            Family::Minus => (Sector::Valence, Sector::NsMinus),
            Family::NsPlus => (Sector::NsPlus, Sector::NsPlus),
            Family::NsMinus => (Sector::NsMinus, Sector::NsMinus),
        };
        let whole = match self.family {
            Family::Plus => pack(self.gluon(), &self.singlet(nf), offsets),
            Family::Minus => self.singlet(nf),
            Family::NsPlus | Family::NsMinus => self.light_sum().clone(),
        };
        let share = -1.0 / self.light as f64;
        let deviation = |flavour| {
            let mut deviation = self.heavy(flavour).cloned().unwrap_or_else(|| self.empty());
            deviation.add_scaled(share, self.light_sum());
            deviation
        };
        let differences: Vec<Matrix> = self.active(nf).into_iter().map(deviation).collect();
        ((sum, whole), (!differences.is_empty()).then(|| (difference, side_by_side(&differences))))
    }

    /// Adds `factor` times columns of the same kind; a channel that only they hold is taken over.
    pub fn add_scaled(&mut self, factor: f64, other: &Self) {
        for (own, other) in self.channels.iter_mut().zip(&other.channels) {
            if let Some(other) = other {
                own.get_or_insert_with(|| Matrix::zeros(other.rows(), other.cols())).add_scaled(factor, other);
            }
        }
    }

    /// Zeros in every channel of these.
    pub fn nothing(&self) -> Self {
        let zeros = |own: &Option<Matrix>| own.as_ref().map(|own| Matrix::zeros(own.rows(), own.cols()));
        Self { channels: self.channels.each_ref().map(zeros), ..*self }
    }

    /// Moves all momentum below `x_min` to the gluon's last row.
    pub fn gather_momentum(&mut self) {
        let mut total = vec![0.0; self.light_sum().cols()];
        for matrix in self.channels.iter_mut().flatten() {
            let last = matrix.rows() - 1;
            for (sum, value) in total.iter_mut().zip(matrix.row_mut(last)) {
                *sum += std::mem::take(value);
            }
        }
        let gluon = self.gluon_mut();
        let last = gluon.rows() - 1;
        gluon.row_mut(last).copy_from_slice(&total);
    }

    /// Heavy flavours that are not active at nf.
    pub fn inactive(&self, nf: usize) -> Self {
        let mut channels = [const { None }; CHANNELS];
        for (place, channel) in self.channels.iter().enumerate().skip(CHARM_PLACE) {
            if place - CHARM_PLACE + CHARM > nf {
                channels[place].clone_from(channel);
            }
        }
        Self { family: self.family, light: self.light, channels }
    }

    fn channel_mut(&mut self, channel: usize) -> &mut Matrix {
        // Asked for the light channel, or the gluon of the plus family: set by the constructors and never removed.
        self.channels[channel].as_mut().expect("every family holds the light channel, plus the gluon")
    }
}

/// Gluon and singlet as the singlet pair is ordered; the last row is the momentum below `x_min`.
fn pack(gluon: &Matrix, singlet: &Matrix, offsets: &[usize]) -> Matrix {
    let n = offsets[offsets.len() - 1];
    let mut pair = Matrix::zeros(2 * n + 1, gluon.cols());
    for (component, source) in [gluon, singlet].iter().enumerate() {
        for i in 0..n {
            pair.row_mut(place(offsets, component, i)).copy_from_slice(source.row(i));
        }
    }
    pair.row_mut(2 * n).copy_from_slice(gluon.row(n));
    pair
}

/// Matrices of equal height beside each other.
fn side_by_side(parts: &[Matrix]) -> Matrix {
    let rows = parts.first().map_or(0, Matrix::rows);
    let values = (0..rows).flat_map(|i| parts.iter().flat_map(move |part| part.row(i))).copied().collect();
    Matrix::from_values(rows, parts.iter().map(Matrix::cols).sum(), values)
}
