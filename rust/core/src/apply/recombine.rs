//! Flavours (PDG numbers) into the combinations that evolve alone, and back.

use crate::error::{Error, Result};

/// PDG number of the gluon.
pub const GLUON: i64 = 21;

/// Accepts 21 and the quarks +-1 .. +-6.
///
/// # Errors
/// [`Error::Argument`] for another number.
pub fn check_flavour(flavour: i64) -> Result<()> {
    if flavour == GLUON || (1..=6).contains(&flavour.abs()) {
        return Ok(());
    }
    Err(Error::Argument {
        name: "flavour",
        value: flavour.to_string(),
        allowed: "must be 21 (gluon) or a quark from -6 to 6 without 0 (PDG numbers)".into(),
    })
}

/// Where the blocks of a set stand, by what they do.
#[derive(Debug, Clone)]
pub struct Blocks {
    names: Vec<String>,
    /// Number of flavours that act alike.
    pub light: usize,
}

/// Names of the heavy flavours 4, 5, 6.
const HEAVY_NAMES: [&str; 3] = ["charm", "bottom", "top"];

/// A combination of densities on which blocks act.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Channel {
    /// The gluon.
    Gluon,
    /// The sum of `q + qbar` over the light flavours.
    LightPlus,
    /// The sum of `q - qbar` over the light flavours.
    LightMinus,
    /// `h + hbar` of one heavy flavour.
    HeavyPlus(usize),
    /// `h - hbar` of one heavy flavour.
    HeavyMinus(usize),
}

impl Channel {
    /// The name in block names.
    pub fn name(self) -> String {
        match self {
            Self::Gluon => "gluon".into(),
            Self::LightPlus => "light+".into(),
            Self::LightMinus => "light-".into(),
            Self::HeavyPlus(flavour) => format!("{}+", HEAVY_NAMES[flavour - 4]),
            Self::HeavyMinus(flavour) => format!("{}-", HEAVY_NAMES[flavour - 4]),
        }
    }

    /// Whether it is a sum `q + qbar` or the gluon.
    pub fn is_plus(self) -> bool {
        !matches!(self, Self::LightMinus | Self::HeavyMinus(_))
    }
}

impl Blocks {
    /// Reads the names of a set.
    ///
    /// # Errors
    /// [`Error::Argument`] where the blocks that every set has are missing.
    pub fn new(names: &[String], light: usize) -> Result<Self> {
        let blocks = Self { names: names.to_vec(), light };
        for needed in ["gluon<-gluon", "gluon<-light+", "light+<-gluon", "light+<-light+", "ns+"] {
            if blocks.position(needed).is_none() {
                return Err(Error::Argument {
                    name: "block names",
                    value: format!("{names:?}"),
                    allowed: format!("there must be a block {needed}"),
                });
            }
        }
        Ok(blocks)
    }

    /// The names as given.
    pub fn names(&self) -> &[String] {
        &self.names
    }

    /// Whether a block of this name is held.
    pub fn has(&self, name: &str) -> bool {
        self.position(name).is_some()
    }

    /// The block from one channel to another, if it is not zero: light to light of `q - qbar` falls back to `ns-`,
    /// that to `ns+`.
    pub fn between(&self, output: Channel, input: Channel) -> Option<usize> {
        self.position(&format!("{}<-{}", output.name(), input.name())).or_else(|| {
            (output == Channel::LightMinus && input == Channel::LightMinus).then(|| self.difference(false)).flatten()
        })
    }

    /// The block of differences among light flavours, of `q + qbar` or `q - qbar`.
    pub fn difference(&self, plus: bool) -> Option<usize> {
        let plus_block = || self.position("ns+");
        if plus { plus_block() } else { self.position("ns-").or_else(plus_block) }
    }

    /// The output channels that a set can fill, plus ones first.
    pub fn outputs(&self) -> Vec<Channel> {
        let heavy = (self.light + 1).max(4)..=6;
        let all = [Channel::Gluon, Channel::LightPlus]
            .into_iter()
            .chain(heavy.clone().map(Channel::HeavyPlus))
            .chain([Channel::LightMinus])
            .chain(heavy.map(Channel::HeavyMinus));
        all.filter(|&output| {
            output == Channel::LightMinus
                || self.names.iter().any(|name| name.starts_with(&format!("{}<-", output.name())))
        })
        .collect()
    }

    /// The input channels that act on an output.
    pub fn inputs(&self, output: Channel) -> Vec<(Channel, usize)> {
        let heavy = (self.light + 1).max(4)..=6;
        let candidates: Vec<Channel> = if output.is_plus() {
            [Channel::Gluon, Channel::LightPlus].into_iter().chain(heavy.map(Channel::HeavyPlus)).collect()
        } else {
            [Channel::LightMinus].into_iter().chain(heavy.map(Channel::HeavyMinus)).collect()
        };
        candidates.into_iter().filter_map(|input| self.between(output, input).map(|block| (input, block))).collect()
    }

    /// Whether an input flavour can be carried.
    pub fn accepts(&self, flavour: i64) -> bool {
        let quark = flavour.unsigned_abs() as usize;
        flavour == GLUON || quark <= self.light || !self.inputs_named(Channel::HeavyPlus(quark)).is_empty()
    }

    fn inputs_named(&self, input: Channel) -> Vec<&String> {
        let end = format!("<-{}", input.name());
        self.names.iter().filter(|name| name.ends_with(&end)).collect()
    }

    fn position(&self, name: &str) -> Option<usize> {
        self.names.iter().position(|known| known == name)
    }
}
