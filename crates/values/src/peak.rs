//! A line that a scan shows.

use crate::TwoTheta;

/// One line of a powder pattern as observed; what is not known is `None`, never zero.
///
/// The position is that of Kα1 (or of the one line); the zero of the instrument is not taken off.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Peak {
    /// Observed position.
    pub two_theta: TwoTheta,
    /// Total standard uncertainty of the position, degrees 2θ.
    pub u_two_theta_deg: Option<f64>,
    /// Its part from counting, degrees 2θ.
    pub u_counting_deg: Option<f64>,
    /// Its part from the model, common to the same line on the same instrument, degrees 2θ.
    pub u_model_deg: Option<f64>,
    /// Intensity on any scale; `area` where only that is given.
    pub intensity: Option<f64>,
    /// Integrated intensity of Kα1, counts × degree.
    pub area: Option<f64>,
    /// Full width at half maximum of Kα1, degrees 2θ.
    pub fwhm_deg: Option<f64>,
    /// Line of the file that it was read from, from 1; 0 if it came from elsewhere.
    pub source_line: usize,
}

impl Peak {
    /// A line of which only the position is known.
    #[must_use]
    pub fn at(two_theta: TwoTheta) -> Self {
        Self {
            two_theta,
            u_two_theta_deg: None,
            u_counting_deg: None,
            u_model_deg: None,
            intensity: None,
            area: None,
            fwhm_deg: None,
            source_line: 0,
        }
    }

    /// The same line with a total standard uncertainty of its position, degrees 2θ.
    #[must_use]
    pub fn with_u_deg(self, u_two_theta_deg: f64) -> Self {
        Self { u_two_theta_deg: Some(u_two_theta_deg), ..self }
    }

    /// Intensity, else area: what ranks lines by strength.
    #[must_use]
    pub fn strength(&self) -> Option<f64> {
        self.intensity.or(self.area)
    }
}

#[cfg(test)]
mod tests {
    use super::Peak;
    use crate::TwoTheta;

    #[test]
    fn strength_is_the_intensity_and_the_area_only_where_that_is_all_there_is() {
        let bare = Peak::at(TwoTheta::from_deg(30.0));
        assert_eq!(bare.strength(), None);
        assert_eq!(Peak { area: Some(2.0), ..bare }.strength(), Some(2.0));
        assert_eq!(Peak { area: Some(2.0), intensity: Some(100.0), ..bare }.strength(), Some(100.0));
    }
}
