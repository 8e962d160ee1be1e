//! Flavours (PDG numbers) into the combinations that evolve alone, and back.

use crate::coupling::{FEWEST, MOST};
use crate::error::{Error, Result};
use crate::evolution::{CHARM, GLUON, HEAVY_NAMES};

/// Accepts 21 and the quarks +-1 .. +-6.
///
/// # Errors
/// [`Error::Argument`] for another number.
pub fn check_flavour(flavour: i64) -> Result<()> {
    if flavour == GLUON || (1..=6).contains(&flavour.unsigned_abs()) {
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
    /// What one light flavour's `q + qbar` differs from the mean.
    DifferencePlus(usize),
    /// What one light flavour's `q - qbar` differs from the mean.
    DifferenceMinus(usize),
}

impl Channel {
    /// The name in block names.
    pub fn name(self) -> String {
        match self {
            Self::Gluon => "gluon".into(),
            Self::LightPlus => "light+".into(),
            Self::LightMinus => "light-".into(),
            Self::HeavyPlus(flavour) => format!("{}+", HEAVY_NAMES[flavour - CHARM]),
            Self::HeavyMinus(flavour) => format!("{}-", HEAVY_NAMES[flavour - CHARM]),
            Self::DifferencePlus(_) => "ns+".into(),
            Self::DifferenceMinus(_) => "ns-".into(),
        }
    }

    /// Whether it is a sum `q + qbar` or the gluon.
    pub fn is_plus(self) -> bool {
        !matches!(self, Self::LightMinus | Self::HeavyMinus(_) | Self::DifferenceMinus(_))
    }
}

impl Blocks {
    /// Reads the names of a set.
    ///
    /// # Errors
    /// [`Error::Argument`] where the blocks that every set has are missing, or `light` is not 3 to 6.
    pub fn new(names: &[String], light: usize) -> Result<Self> {
        if !(FEWEST..=MOST).contains(&light) {
            return Err(Error::Argument {
                name: "light",
                value: light.to_string(),
                allowed: "it must be 3 to 6".into(),
            });
        }
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

    /// The input channels that act on an output.
    pub fn inputs(&self, output: Channel) -> Vec<(Channel, usize)> {
        let heavy = (self.light + 1).max(CHARM)..=6;
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

/// How flavours become channels, what acts on them, and how channels become flavours.
pub struct Recombination {
    /// Number of input flavours.
    pub in_flavours: usize,
    /// For each channel `(index of the input flavour, weight)`.
    pub into_channels: Vec<Vec<(usize, f64)>>,
    /// `(output channel, input channel, block)`.
    pub actions: Vec<(usize, usize, usize)>,
    /// For each output flavour `(channel, weight)`.
    pub from_channels: Vec<Vec<(usize, f64)>>,
}

impl Recombination {
    /// The ways of a set between lists of flavours.
    pub fn new(blocks: &Blocks, in_flavours: &[i64], out_flavours: &[i64]) -> Self {
        let light = blocks.light;
        // Differences add up to zero, so that of the last light flavour is not carried.
        let differences = || 1..light;
        let heavy = || (light + 1).max(CHARM)..=6;
        let channels: Vec<Channel> = [Channel::Gluon, Channel::LightPlus, Channel::LightMinus]
            .into_iter()
            .chain(heavy().map(Channel::HeavyPlus))
            .chain(heavy().map(Channel::HeavyMinus))
            .chain(differences().map(Channel::DifferencePlus))
            .chain(differences().map(Channel::DifferenceMinus))
            .collect();
        let index = |channel: Channel| channels.iter().position(|known| *known == channel);
        let into = |channel: &Channel| {
            let weights = in_flavours.iter().map(|&flavour| weight_in(*channel, flavour, light)).enumerate();
            weights.filter(|(_, weight)| *weight != 0.0).collect()
        };
        let mut actions = Vec::new();
        for (output, &channel) in channels.iter().enumerate() {
            match channel {
                Channel::DifferencePlus(_) | Channel::DifferenceMinus(_) => {
                    let block = blocks.difference(channel.is_plus());
                    actions.extend(block.map(|block| (output, output, block)));
                }
                _ => {
                    let inputs = blocks.inputs(channel).into_iter();
                    actions.extend(inputs.filter_map(|(input, block)| Some((output, index(input)?, block))));
                }
            }
        }
        let from = |&flavour: &i64| {
            let parts = parts_of(flavour, light).into_iter();
            parts.filter_map(|(channel, weight)| Some((index(channel)?, weight))).collect()
        };
        Self {
            in_flavours: in_flavours.len(),
            into_channels: channels.iter().map(into).collect(),
            actions,
            from_channels: out_flavours.iter().map(from).collect(),
        }
    }
}

/// The weight of an input flavour in a channel.
fn weight_in(channel: Channel, flavour: i64, light: usize) -> f64 {
    if flavour == GLUON {
        return f64::from(channel == Channel::Gluon);
    }
    let quark = flavour.unsigned_abs() as usize;
    let sign = if channel.is_plus() { 1.0 } else { flavour.signum() as f64 };
    let off_mean = |own: usize| f64::from(own == quark) - 1.0 / light as f64;
    sign * match channel {
        Channel::LightPlus | Channel::LightMinus => f64::from(quark <= light),
        Channel::HeavyPlus(own) | Channel::HeavyMinus(own) => f64::from(own == quark),
        Channel::DifferencePlus(own) | Channel::DifferenceMinus(own) if quark <= light => off_mean(own),
        Channel::Gluon | Channel::DifferencePlus(_) | Channel::DifferenceMinus(_) => 0.0,
    }
}

/// The channels that make up an output flavour: `q = ((q + qbar) + (q - qbar))/2`, a light flavour's parts being its
/// difference and its share of the light sum.
fn parts_of(flavour: i64, light: usize) -> Vec<(Channel, f64)> {
    if flavour == GLUON {
        return vec![(Channel::Gluon, 1.0)];
    }
    let quark = flavour.unsigned_abs() as usize;
    let (plus, minus) = (0.5, 0.5 * flavour.signum() as f64);
    if quark > light {
        return vec![(Channel::HeavyPlus(quark), plus), (Channel::HeavyMinus(quark), minus)];
    }
    let share = 1.0 / light as f64;
    let mut parts = vec![(Channel::LightPlus, share * plus), (Channel::LightMinus, share * minus)];
    let (others, sign) = if quark < light { (quark..quark + 1, 1.0) } else { (1..light, -1.0) };
    for own in others {
        parts.push((Channel::DifferencePlus(own), sign * plus));
        parts.push((Channel::DifferenceMinus(own), sign * minus));
    }
    parts
}
