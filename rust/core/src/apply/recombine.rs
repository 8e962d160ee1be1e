//! Flavours (PDG numbers) into the combinations that evolve alone, and back.

use crate::coupling::{FEWEST, MOST};
use crate::error::{Error, Result};
use crate::evolution::{CHARM, GLUON, HEAVY_NAMES};

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
    /// Number of flavours that act alike.
    pub light: usize,
    /// Where the gluon stands in the input.
    pub gluon: Option<usize>,
    /// Where quark and antiquark stand in the input, from the first quark on.
    pub quarks: [[Option<usize>; 2]; MOST],
    /// The combinations that evolve.
    pub channels: Vec<Channel>,
    /// `(output channel, input channel, block)`.
    pub actions: Vec<(usize, usize, usize)>,
    /// Number of output flavours.
    pub out_flavours: usize,
    /// The gluon and each quark that is asked for.
    pub from_channels: Vec<Parts>,
}

/// What a quark and its antiquark are made of, or the gluon.
pub struct Parts {
    quark: usize,
    /// `(channel, weight)` of what both have of `q + qbar`.
    pub even: Vec<(usize, f64)>,
    /// `(channel, weight)` of what the quark has of `q - qbar`.
    pub odd: Vec<(usize, f64)>,
    /// Places in the output, with the sign of the odd part.
    pub places: Vec<(usize, f64)>,
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
        let held = |flavour: i64| in_flavours.iter().position(|known| *known == flavour);
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
        let mut from_channels: Vec<Parts> = Vec::new();
        for (place, &flavour) in out_flavours.iter().enumerate() {
            let quark = if flavour == GLUON { 0 } else { flavour.unsigned_abs() as usize };
            if !from_channels.iter().any(|parts| parts.quark == quark) {
                let terms = |plus: bool| {
                    let terms = parts_of(quark, light).into_iter().filter(|(channel, _)| channel.is_plus() == plus);
                    terms.filter_map(|(channel, weight)| Some((index(channel)?, weight))).collect()
                };
                from_channels.push(Parts { quark, even: terms(true), odd: terms(false), places: vec![] });
            }
            let own = from_channels.iter_mut().filter(|parts| parts.quark == quark);
            own.for_each(|parts| parts.places.push((place, flavour.signum() as f64)));
        }
        Self {
            in_flavours: in_flavours.len(),
            light,
            gluon: held(GLUON),
            quarks: std::array::from_fn(|quark| [held(quark as i64 + 1), held(-(quark as i64) - 1)]),
            actions,
            out_flavours: out_flavours.len(),
            from_channels,
            channels,
        }
    }
}

/// The channels that make up a quark (0: the gluon): `q = ((q + qbar) + (q - qbar))/2`, a light flavour's parts being
/// its difference and its share of the light sum.
fn parts_of(quark: usize, light: usize) -> Vec<(Channel, f64)> {
    const HALF: f64 = 0.5;
    if quark == 0 {
        return vec![(Channel::Gluon, 1.0)];
    }
    if quark > light {
        return vec![(Channel::HeavyPlus(quark), HALF), (Channel::HeavyMinus(quark), HALF)];
    }
    let share = HALF / light as f64;
    let mut parts = vec![(Channel::LightPlus, share), (Channel::LightMinus, share)];
    let (others, sign) = if quark < light { (quark..quark + 1, 1.0) } else { (1..light, -1.0) };
    for own in others {
        parts.push((Channel::DifferencePlus(own), sign * HALF));
        parts.push((Channel::DifferenceMinus(own), sign * HALF));
    }
    parts
}
