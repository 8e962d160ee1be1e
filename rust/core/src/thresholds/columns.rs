//! Some columns of the operators (or some densities): what became of them at one scale, flavour by flavour.
//!
//! Flavours 1 to `light` act alike along the whole route and are held as one sum; differences among them evolve in
//! families of their own. Each matrix has one row a node and a last row: what has flowed below `x_min` (all of the
//! momentum in that of the gluon, each flavour's own number elsewhere).

use crate::evolution::{CHARM, Sector, Stretch, StretchSolution, place};
use crate::numerics::blocks::Matrix;

/// Gluon, light sum, charm, bottom, top.
const CHANNELS: usize = 5;
/// Their places.
const GLUON_PLACE: usize = 0;
const LIGHT_PLACE: usize = 1;
const CHARM_PLACE: usize = 2;

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

/// A heavy flavour, how its difference from a share of the light sum evolves, and that difference.
type Difference = (usize, Sector, Matrix);

/// Values of some columns at one scale.
#[derive(Debug, Clone)]
pub struct Columns {
    /// Their family.
    pub family: Family,
    light: usize,
    channels: [Option<Matrix>; CHANNELS],
}

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

    /// The gluon. Only the plus family has one; to others their light sum stands in, and nobody asks.
    pub fn gluon(&self) -> &Matrix {
        self.channels[GLUON_PLACE].as_ref().unwrap_or(self.light_sum())
    }

    /// The gluon. Only the plus family has one; to others their light sum stands in, and nobody asks.
    pub fn gluon_mut(&mut self) -> &mut Matrix {
        let place = if self.family == Family::Plus { GLUON_PLACE } else { LIGHT_PLACE };
        self.channel_mut(place)
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
        Self { channels: self.channels.each_ref().map(|own| own.as_ref().map(|_| self.empty())), ..*self }
    }

    /// What evolves alone at nf: the part that holds all flavours, and each heavy flavour less its share of the light
    /// sum.
    fn combinations(&self, nf: usize, offsets: &[usize]) -> ((Sector, Matrix), Vec<Difference>) {
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
        let differences = (self.lightest_heavy()..=nf)
            .filter(|_| matches!(self.family, Family::Plus | Family::Minus))
            .map(|flavour| {
                let mut deviation = self.heavy(flavour).cloned().unwrap_or_else(|| self.empty());
                deviation.add_scaled(share, self.light_sum());
                (flavour, difference, deviation)
            })
            .collect();
        ((sum, whole), differences)
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

    fn channel_mut(&mut self, channel: usize) -> &mut Matrix {
        // Asked for the light channel, or the gluon of the plus family: set by the constructors and never removed.
        self.channels[channel].as_mut().expect("every family holds the light channel, plus the gluon")
    }
}

/// Columns along one leg, at any scale of it.
pub struct LegColumns {
    pub(super) start: Columns,
    nf: usize,
    pub(super) offsets: Vec<usize>,
    /// The part that holds all flavours: singlet pair, valence, or the only content.
    pub(super) sum: StretchSolution,
    /// Each heavy flavour less its share of the light sum.
    pub(super) differences: Vec<(usize, StretchSolution)>,
}

impl LegColumns {
    /// Carries columns along a stretch of nf flavours. Rows of panels before `first` are zero.
    pub fn new(start: Columns, stretch: &Stretch, nf: usize, offsets: &[usize], first: usize) -> Self {
        let ((sector, whole), differences) = start.combinations(nf, offsets);
        let differences = differences
            .into_iter()
            .map(|(flavour, sector, deviation)| (flavour, stretch.solve(sector, deviation, first)))
            .collect();
        let sum = stretch.solve(sector, whole, first);
        Self { start, nf, offsets: offsets.to_vec(), sum, differences }
    }

    /// The columns where the leg is entered.
    pub fn at_start(&self) -> &Columns {
        &self.start
    }

    /// Another function of s: `map(sector, s, C)` of each combination that evolves alone, nothing of what does not
    /// evolve.
    #[must_use]
    pub fn mapped(&self, map: impl Fn(Sector, f64, &Matrix) -> Matrix) -> Self {
        let start = self.start.nothing();
        let ((sector, _), differences) = start.combinations(self.nf, &self.offsets);
        let differences = differences
            .iter()
            .zip(&self.differences)
            .map(|((flavour, sector, _), of)| (*flavour, of.1.mapped(|s, columns| map(*sector, s, columns))))
            .collect();
        let sum = self.sum.mapped(|s, columns| map(sector, s, columns));
        Self { start, nf: self.nf, offsets: self.offsets.clone(), sum, differences }
    }

    /// How these columns move with a parameter.
    ///
    /// `entered` is how those at the start of the leg do there, at a fixed scale; `moving(sector, s, C)` is
    /// `A(s) C ds/dp`. What the start moves away from under the columns is carried on with what enters; `stretch` and
    /// `first` as for [`LegColumns::new`].
    pub fn derivative(
        &self,
        entered: Columns,
        stretch: &Stretch,
        first: usize,
        moving: impl Fn(Sector, f64, &Matrix) -> Matrix,
    ) -> Self {
        let carry = |sector: Sector, mut entered: Matrix, of: &StretchSolution| {
            let (s, start) = of.start();
            entered.add_scaled(-1.0, &moving(sector, s, start));
            let mut moved = stretch.solve(sector, entered, first);
            moved.add(&of.mapped(|s, columns| moving(sector, s, columns)));
            moved
        };
        let ((sector, whole), entering) = entered.combinations(self.nf, &self.offsets);
        let sum = carry(sector, whole, &self.sum);
        let differences = entering
            .into_iter()
            .zip(&self.differences)
            .map(|((flavour, sector, deviation), (_, of))| (flavour, carry(sector, deviation, of)))
            .collect();
        Self { start: entered, nf: self.nf, offsets: self.offsets.clone(), sum, differences }
    }

    /// The columns at `s = ln a`.
    pub fn at(&self, s: f64) -> Columns {
        // One scale gives one set of columns.
        self.at_many(&[s]).swap_remove(0)
    }

    /// The columns at several scales.
    pub fn at_many(&self, s: &[f64]) -> Vec<Columns> {
        let mut deviations: Vec<_> = self
            .differences
            .iter()
            .map(|(flavour, solution)| solution.at_many(s).into_iter().map(move |values| (*flavour, values)))
            .collect();
        let sums = self.sum.at_many(s);
        sums.into_iter()
            .map(|sum| self.by_flavour(sum, deviations.iter_mut().filter_map(Iterator::next).collect()))
            .collect()
    }

    /// Flavours from their sum and what each heavy one differs from its share of the light sum.
    ///
    /// With `d_h = h - L/light` and `Sigma = L + sum_h h`: `L = (light/nf) (Sigma - sum_h d_h)`.
    fn by_flavour(&self, sum: Matrix, deviations: Vec<(usize, Matrix)>) -> Columns {
        let mut columns = self.inactive();
        if matches!(columns.family, Family::NsPlus | Family::NsMinus) {
            columns.channels[LIGHT_PLACE] = Some(sum);
            return columns;
        }
        let mut average = sum;
        if columns.family == Family::Plus {
            let (gluon, quarks) = unpack(&average, &self.offsets);
            columns.channels[GLUON_PLACE] = Some(gluon);
            average = quarks;
        }
        for (_, deviation) in &deviations {
            average.add_scaled(-1.0, deviation);
        }
        average.scale(1.0 / self.nf as f64);
        for (flavour, mut heavy) in deviations {
            heavy.add_scaled(1.0, &average);
            columns.set_heavy(flavour, heavy);
        }
        average.scale(columns.light as f64);
        columns.channels[LIGHT_PLACE] = Some(average);
        if columns.family == Family::Plus {
            columns.gather_momentum();
        }
        columns
    }

    /// What does not evolve on this leg: heavy flavours that are not active.
    fn inactive(&self) -> Columns {
        let mut channels = [const { None }; CHANNELS];
        for (place, channel) in self.start.channels.iter().enumerate().skip(CHARM_PLACE) {
            if place - CHARM_PLACE + CHARM > self.nf {
                channels[place].clone_from(channel);
            }
        }
        Columns { family: self.start.family, light: self.start.light, channels }
    }

    /// Estimated error relative to each value at the nodes named, over the whole leg.
    pub fn error(&self, nodes: &[usize]) -> f64 {
        let sum = if self.start.family == Family::Plus {
            let rows = |component| nodes.iter().map(move |&i| place(&self.offsets, component, i));
            self.sum.error(&rows(0).chain(rows(1)).collect::<Vec<_>>())
        } else {
            self.sum.error(nodes)
        };
        self.differences.iter().map(|(_, solution)| solution.error(nodes)).fold(sum, f64::max)
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

fn unpack(pair: &Matrix, offsets: &[usize]) -> (Matrix, Matrix) {
    let n = offsets[offsets.len() - 1];
    let mut parts = [Matrix::zeros(n + 1, pair.cols()), Matrix::zeros(n + 1, pair.cols())];
    for (component, part) in parts.iter_mut().enumerate() {
        for i in 0..n {
            part.row_mut(i).copy_from_slice(pair.row(place(offsets, component, i)));
        }
    }
    parts[0].row_mut(n).copy_from_slice(pair.row(2 * n));
    let [gluon, singlet] = parts;
    (gluon, singlet)
}
