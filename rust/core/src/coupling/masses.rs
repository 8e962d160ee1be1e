//! Heavy-quark masses: pole or MS-bar.

/// Which mass a number is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum MassKind {
    /// Pole mass M.
    #[default]
    Pole,
    /// MS-bar mass at its own scale, m(m).
    Msbar,
}

/// Masses of the heavy quarks in `GeV`, increasing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Masses {
    /// Charm.
    pub charm: f64,
    /// Bottom.
    pub bottom: f64,
    /// Top.
    pub top: f64,
    /// Pole masses or m(m).
    pub kind: MassKind,
}

impl Masses {
    /// Charm, bottom, top, in `GeV`: the quarks that become active with the 4th, 5th and 6th flavour.
    pub fn values(&self) -> [f64; 3] {
        [self.charm, self.bottom, self.top]
    }
}
