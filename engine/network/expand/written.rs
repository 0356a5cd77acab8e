//! Owns the way from a written gas, light or cosmic line to its reaction.

use super::{Expansion, Origin, default_within};
use crate::network::groups::{self, Group};
use crate::network::layout::{Below, LimitLine};
use crate::network::model::{Cause, Range};
use crate::network::read::Entry;

impl Expansion<'_> {
    /// A reaction written in the file, other than on surfaces.
    pub(super) fn written(&mut self, entry: &Entry) {
        let file = &self.network.file;
        let range = |valid, below: Option<Below>| Range {
            valid,
            below: below.unwrap_or(Below::Extend),
        };
        let below = |below: Option<Below>| below.unwrap_or(Below::Extend);
        // Every line type carries these three; only the cause differs.
        macro_rules! origin {
            ($line:expr) => {
                Origin {
                    line: entry.line,
                    within: $line.within.unwrap_or(default_within($line.standing)),
                    standing: $line.standing,
                    source: &$line.source,
                }
            };
        }
        let (cause, origin) = match entry.group {
            Group::Gas | Group::ThreeBody => {
                let lines = if entry.group == Group::Gas {
                    &file.gas
                } else {
                    &file.three_body
                };
                let line = &lines[entry.index];
                let pieces = groups::pieces(line);
                (
                    Cause::PowerLaw {
                        pieces,
                        below: below(line.below),
                    },
                    origin!(line),
                )
            }
            Group::ThirdBody => {
                let line = &file.third_body[entry.index];
                let pieces = groups::pieces(line);
                (
                    Cause::ThirdBody {
                        pieces,
                        below: below(line.below),
                    },
                    origin!(line),
                )
            }
            Group::Capture => {
                let line = &file.capture[entry.index];
                let range = range(line.valid, line.below);
                let (langevin, x_300k) = (line.langevin, line.x_300k);
                (
                    Cause::Capture {
                        langevin,
                        x_300k,
                        range,
                    },
                    origin!(line),
                )
            }
            Group::Falloff => {
                let line = &file.falloff[entry.index];
                let numbers = |l: &LimitLine| [l.at_300k, l.slope, l.barrier];
                let (low, high) = (numbers(&line.low), numbers(&line.high));
                let range = range(line.valid, line.below);
                (
                    Cause::Falloff {
                        low,
                        high,
                        centre: line.centre,
                        range,
                    },
                    origin!(line),
                )
            }
            Group::Light => {
                let line = &file.light[entry.index];
                let others = file
                    .spectra
                    .keys()
                    .map(|name| line.spectra.get(name).copied());
                let rates = std::iter::once(Some(line.rate)).chain(others).collect();
                let named = |name: &String| file.shielding.iter().position(|s| s.name == *name);
                let shield = line.shield.as_ref().and_then(named);
                (
                    Cause::Light {
                        rates,
                        extinction: line.extinction,
                        shield,
                    },
                    origin!(line),
                )
            }
            Group::Cosmic => {
                let line = &file.cosmic[entry.index];
                let cause = match (line.direct, line.secondary) {
                    (Some(value), _) => Cause::Ionisation { value },
                    (None, value) => Cause::SecondaryLight {
                        value: value.unwrap_or(0.0),
                    },
                };
                (cause, origin!(line))
            }
            Group::Surface => return,
        };
        let (consumed, products) = (self.ids(&entry.reactants), self.ids(&entry.products));
        self.add(entry.change.clone(), consumed, products, cause, &origin);
    }
}
