//! What an entry under pressure control says of the lung.

use super::{Bedside, Mechanics, Worth};
use crate::case::fault::{Fault, Place};
use crate::physiology::breath::bedside::{self, HoldResistance};
use crate::physiology::breath::pressure_control::PressureBreath;
use crate::planning::caution::Cautions;

impl Mechanics {
    pub(super) fn read_pressure_control(
        &mut self,
        at: &Bedside<'_>,
        pressure: f64,
        cautions: &mut Cautions,
    ) -> Result<(), Fault> {
        let Bedside { number, settings, measured, phases } = *at;
        let Some(exhaled) = measured.exhaled_tidal_volume_ml else { return Ok(()) };
        let volume_ml = Self::corrected_volume(number, exhaled, settings, measured)?;
        let breath = PressureBreath {
            inspiratory_pressure_cmh2o: pressure,
            peep_cmh2o: settings.peep_cmh2o,
            scale: 1.0,
            phases,
        };
        self.measured_pressure_breath = Some((breath, volume_ml));
        if let Some(above) = at.plateau_above_peep() {
            return self.read_hold(at, pressure, volume_ml, above, cautions);
        }
        if measured.compliance_ml_cmh2o.is_some() {
            return Ok(());
        }
        let better = |worth: Worth| self.compliance.is_none_or(|(_, had)| had <= worth);
        let expiratory = self.expiratory_resistance.map(|(value, _)| value).or(self.inspiratory_resistance);
        let resistances = self.inspiratory_resistance.zip(expiratory);
        if let Some((inspiratory, expiratory)) = resistances {
            // A resistance typed in this entry makes it the latest that yields a compliance.
            if !better(Worth::Volume) && measured.resistance_cmh2o_s_l.is_none() {
                return Ok(());
            }
            let found = match at.auto_peep() {
                Some(auto) => bedside::compliance_above_auto_peep(
                    volume_ml,
                    pressure - auto,
                    inspiratory,
                    phases.inspiratory_s,
                ),
                None => {
                    bedside::compliance_from_volume(volume_ml, pressure, inspiratory, expiratory, &phases)
                }
            };
            let Some(compliance) = found else {
                return Err(Fault::new(
                    [
                        Place::in_entry(number, "measured", "exhaled_tidal_volume"),
                        Place::in_entry(number, "measured", "resistance"),
                    ],
                    format!(
                        "{volume_ml:.0} mL cannot be moved by {pressure:.0} cmH2O through a resistance of \
                         {inspiratory:.0} cmH2O·s/L in the time set"
                    ),
                    "Check exhaled_tidal_volume, inspiratory_pressure, resistance and timing.",
                ));
            };
            self.plateau_reading = None;
            self.trapping_unread = false;
            self.compliance = Some((compliance, Worth::Volume));
        } else if better(Worth::Crude) {
            self.compliance = Some((volume_ml / pressure, Worth::Crude));
            self.trapping_unread = true;
            cautions.say(
                "trapping_unknown",
                "Compliance is read as tidal volume over inspiratory pressure, so trapped gas is unknown: an \
                 inspiratory and an expiratory hold settle it.",
            );
        }
        Ok(())
    }

    /// A plateau from a hold in pressure control gives compliance and inspiratory resistance.
    fn read_hold(
        &mut self,
        at: &Bedside<'_>,
        pressure: f64,
        volume_ml: f64,
        above: f64,
        cautions: &mut Cautions,
    ) -> Result<(), Fault> {
        let Bedside { measured, phases, .. } = *at;
        let given_compliance = measured.compliance_ml_cmh2o;
        let given_resistance = measured.resistance_cmh2o_s_l;
        let expiratory = self.expiratory_resistance.map(|(value, _)| value).or(given_resistance);
        self.plateau_reading = None;
        let (compliance, auto) = if let Some(auto) = at.auto_peep() {
            let driving = at.driving(above, auto)?;
            self.trapping_unread = false;
            (given_compliance.unwrap_or_else(|| bedside::compliance(volume_ml, driving)), auto)
        } else if expiratory.is_some() {
            let compliance = match given_compliance {
                Some(given) => given,
                None => self.compliance_from_plateau(&at.plateau_reading(volume_ml, above), cautions)?,
            };
            (compliance, (above - volume_ml / compliance).max(0.0))
        } else {
            self.trapping_unread = false;
            let auto = bedside::auto_peep_from_hold(pressure, above, &phases);
            let compliance = given_compliance.unwrap_or(volume_ml / (above - auto));
            let resistance = bedside::inspiratory_resistance_from_hold(
                pressure,
                above,
                auto,
                compliance,
                phases.inspiratory_s,
            );
            let share = bedside::emptying_share(volume_ml, above, phases.expiratory_s, resistance.value());
            if given_compliance.is_none()
                && (share > bedside::EMPTYING_LIMIT || compliance > bedside::LARGEST_COMPLIANCE)
            {
                self.trapping_unread = true;
                cautions.say(
                    "trapping_unknown",
                    "The inspiratory hold alone does not tell compliance from trapping: trapped gas is unknown. \
                     Measure total PEEP with an expiratory hold.",
                );
                (volume_ml / above, 0.0)
            } else {
                (compliance, auto)
            }
        };
        self.compliance = Some((compliance, Worth::Plateau));
        if given_resistance.is_none() {
            let resistance = bedside::inspiratory_resistance_from_hold(
                pressure,
                above,
                auto,
                compliance,
                phases.inspiratory_s,
            );
            if let HoldResistance::Small(value) = resistance {
                cautions.say(
                    "resistance_small",
                    format!(
                        "The plateau reaches the inspiratory pressure, so inspiratory resistance is too small to be \
                         read; {value:.0} cmH2O·s/L is taken. Measure it in volume control if it matters."
                    ),
                );
            }
            self.inspiratory_resistance = Some(resistance.value());
        }
        Ok(())
    }
}
