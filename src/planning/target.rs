//! The target: a PaCO2, a pH turned into PaCO2 at the patient's base excess, or the profile's band.

use serde::Serialize;

use super::baseline::Baseline;
use crate::case::fault::{Fault, Place};
use crate::case::profile::Band;
use crate::physiology::acid_base;

/// A typed target is met within this, mmHg: common practice, about the noise of one gas.
pub const TYPED_TOLERANCE_MMHG: f64 = 2.0;
/// How far inside its band a profile target aims, mmHg: common practice.
const INWARD_MMHG: f64 = 3.0;
/// The PaCO2 a target may stand for, mmHg.
pub const TARGET_RANGE_MMHG: [f64; 2] = [10.0, 150.0];

/// What was asked for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Asked {
    /// A PaCO2, mmHg.
    Paco2(f64),
    /// A pH.
    Ph(f64),
    /// The profile's band.
    Profile,
}

impl Asked {
    /// The word in JSON.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Paco2(_) => "paco2",
            Self::Ph(_) => "ph",
            Self::Profile => "profile",
        }
    }
}

/// The target of a plan.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Target {
    /// PaCO2 aimed at, mmHg.
    pub paco2_mmhg: f64,
    /// The pH it stands for.
    pub ph: Option<f64>,
    /// `paco2`, `ph` or `profile`.
    pub asked: &'static str,
    /// The band that counts as on target, mmHg.
    #[serde(skip)]
    pub band_mmhg: [f64; 2],
}

/// The profile's band as PaCO2, mmHg; `None` when it is a pH band and base excess is unknown.
pub fn profile_band_mmhg(band: Band, base_excess_mmol_l: Option<f64>) -> Option<[f64; 2]> {
    match band {
        Band::Paco2(band) => Some(band),
        Band::Ph([low, high]) => base_excess_mmol_l.map(|excess| {
            [acid_base::paco2_at(excess, high).max(0.0), acid_base::paco2_at(excess, low).max(0.0)]
        }),
    }
}

impl Target {
    /// The target for `asked`, with PaCO2 `now_mmhg`.
    ///
    /// # Errors
    /// A pH target without a pH in the gas, or one that stands for a PaCO2 outside 10–150 mmHg.
    pub fn find(asked: Asked, baseline: &Baseline, now_mmhg: f64) -> Result<Self, Fault> {
        let excess = baseline.base_excess_mmol_l;
        let typed = |paco2: f64| (paco2, [paco2 - TYPED_TOLERANCE_MMHG, paco2 + TYPED_TOLERANCE_MMHG]);
        let (paco2_mmhg, band_mmhg) = match asked {
            Asked::Paco2(paco2) => typed(paco2),
            Asked::Ph(ph) => {
                let excess = excess.ok_or_else(|| no_ph("to_ph"))?;
                let paco2 = acid_base::paco2_at(excess, ph);
                in_range(paco2, ph)?;
                typed(paco2)
            }
            Asked::Profile => {
                let band = profile_band_mmhg(baseline.profile.target, excess).ok_or_else(|| no_ph(""))?;
                let [low, high] = band;
                let inward = INWARD_MMHG.min((high - low) / 2.0);
                let aimed = if now_mmhg < low {
                    low + inward
                } else if now_mmhg > high {
                    high - inward
                } else {
                    now_mmhg
                };
                if let (Band::Ph(_), Some(excess)) = (baseline.profile.target, excess) {
                    in_range(aimed, if aimed > 0.0 { acid_base::ph_at(excess, aimed) } else { f64::NAN })?;
                }
                (aimed, band)
            }
        };
        let ph = excess.map(|excess| acid_base::ph_at(excess, paco2_mmhg));
        Ok(Self { paco2_mmhg, ph, asked: asked.word(), band_mmhg })
    }

    /// Whether a PaCO2 is on target.
    pub fn met_by(&self, paco2_mmhg: f64) -> bool {
        let [low, high] = self.band_mmhg;
        (low - 1e-9..=high + 1e-9).contains(&paco2_mmhg)
    }

    /// True for a target typed by the user rather than taken from the profile.
    pub fn typed(&self) -> bool {
        self.asked != Asked::Profile.word()
    }
}

fn no_ph(key: &'static str) -> Fault {
    Fault::new(
        [Place::top("target", key)],
        "a pH target needs the pH of the latest gas, and none is charted",
        "Give the pH of the gas, or aim at a PaCO2, for example --to-paco2 45.",
    )
}

fn in_range(paco2_mmhg: f64, ph: f64) -> Result<(), Fault> {
    let [low, high] = TARGET_RANGE_MMHG;
    if (low..=high).contains(&paco2_mmhg) {
        return Ok(());
    }
    let stands = if paco2_mmhg > 0.0 {
        format!("would need a PaCO2 of {paco2_mmhg:.0} mmHg")
    } else {
        "is reached by no PaCO2".to_owned()
    };
    let which = if ph.is_finite() { format!("pH {ph:.2}") } else { "the profile's pH band".to_owned() };
    Err(Fault::new(
        [Place::top("target", "to_ph")],
        format!(
            "{which} {stands} at this patient's base excess; ventilation can aim at {low:.0} to {high:.0} mmHg"
        ),
        "The disturbance is metabolic: treat its cause, and aim at a PaCO2, for example --to-paco2 30.",
    ))
}
