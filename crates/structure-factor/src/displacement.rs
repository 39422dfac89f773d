//! Displacement parameters as files give them: U and B, doubtful values, assumed ones.

use std::f64::consts::PI;

use crate::Displacement;

/// `B = 8π² U`.
pub(crate) const B_OF_U: f64 = 8.0 * PI * PI;

/// Mean squares above this are beyond any solid, Å² (common practice, no source).
const LARGEST_U: f64 = 0.5;

/// Findings that many atoms can share: one sentence each, with the atoms behind it.
#[derive(Debug, Default)]
pub(crate) struct Grouped(Vec<(&'static str, Vec<String>)>);

impl Grouped {
    /// Adds an atom to the sentence that holds for it.
    pub fn add(&mut self, sentence: &'static str, atom: String) {
        match self.0.iter_mut().find(|(known, _)| *known == sentence) {
            Some((_, atoms)) => atoms.push(atom),
            None => self.0.push((sentence, vec![atom])),
        }
    }

    /// The sentences in the order of their first atoms.
    pub fn into_notes(self) -> impl Iterator<Item = String> {
        self.0.into_iter().map(|(sentence, atoms)| format!("{sentence}: {}", listed(&atoms)))
    }
}

/// Notes a value that is hardly meant: zero or negative, above 0.5 Å², a tensor that is no ellipsoid. It is used as it is.
pub(crate) fn doubt(label: &str, displacement: Displacement, findings: &mut Grouped) {
    match displacement {
        Displacement::IsotropicB(0.0) => findings.add("given with U = 0, as if it did not move", label.to_owned()),
        Displacement::IsotropicB(b) if b < 0.0 => {
            findings.add("negative displacement parameter U, used as it stands", with_u(label, b / B_OF_U));
        }
        Displacement::IsotropicB(b) if b > LARGEST_U * B_OF_U => {
            findings.add("very large displacement parameter U, used as it stands", with_u(label, b / B_OF_U));
        }
        Displacement::Anisotropic(u) if !is_ellipsoid(u) => {
            findings.add("displacement tensor that is not positive definite, used as it stands", label.to_owned());
        }
        Displacement::Anisotropic(u) => {
            if let Some(large) = u[..3].iter().find(|u| **u > LARGEST_U) {
                findings.add("very large displacement parameter U, used as it stands", with_u(label, *large));
            }
        }
        Displacement::IsotropicB(_) => {}
    }
}

fn with_u(label: &str, u: f64) -> String {
    format!("{label} ({u:.4} Å²)")
}

/// Leading minors above zero (Sylvester). The axes do not matter: a scaling of them keeps the signs.
fn is_ellipsoid([u11, u22, u33, u12, u13, u23]: [f64; 6]) -> bool {
    let determinant = u11 * (u22 * u33 - u23 * u23) - u12 * (u12 * u33 - u23 * u13) + u13 * (u12 * u23 - u22 * u13);
    u11 > 0.0 && u11 * u22 - u12 * u12 > 0.0 && determinant > 0.0
}

/// One sentence that lists the atoms whose displacement parameter was assumed.
pub(crate) fn note_assumed(labels: &[String], of: usize, notes: &mut Vec<String>) {
    if labels.is_empty() {
        return;
    }
    if labels.len() == of {
        notes.push("no displacement parameters are given: B = 0 was assumed for all atoms".to_owned());
    } else {
        notes.push(format!("without displacement parameter, B = 0 was assumed: {}", listed(labels)));
    }
}

/// Up to ten names, and how many more there are.
pub(crate) fn listed(names: &[String]) -> String {
    let shown = names.iter().take(10).map(String::as_str).collect::<Vec<_>>().join(", ");
    if names.len() > 10 { format!("{shown} and {} more", names.len() - 10) } else { shown }
}

#[cfg(test)]
mod tests {
    use super::{B_OF_U, Grouped, doubt};
    use crate::Displacement::{Anisotropic, IsotropicB};

    #[test]
    fn doubtful_values_are_named_and_usual_ones_are_not() {
        for (displacement, words) in [
            (IsotropicB(0.0), Some("did not move")),
            (IsotropicB(-0.1), Some("negative")),
            (IsotropicB(0.6 * B_OF_U), Some("very large displacement parameter U, used as it stands: O1 (0.6000 Å²)")),
            (IsotropicB(0.5), None),
            (Anisotropic([0.01, 0.01, 0.01, 0.005, 0.0, 0.0]), None),
            (Anisotropic([0.01, 0.01, 0.01, 0.02, 0.0, 0.0]), Some("positive definite")),
            (Anisotropic([0.01, 0.01, -0.01, 0.0, 0.0, 0.0]), Some("positive definite")),
            (Anisotropic([0.01, 0.9, 0.01, 0.0, 0.0, 0.0]), Some("very large")),
        ] {
            let mut findings = Grouped::default();
            doubt("O1", displacement, &mut findings);
            let said: Vec<String> = findings.into_notes().collect();
            assert_eq!(said.len(), usize::from(words.is_some()), "{displacement:?}: {said:?}");
            assert!(said.concat().contains(words.unwrap_or_default()), "{displacement:?}: {said:?}");
        }
    }

    #[test]
    fn atoms_with_one_finding_share_a_sentence() {
        let mut findings = Grouped::default();
        for number in 1..=12 {
            doubt(&format!("O{number}"), IsotropicB(0.0), &mut findings);
        }
        let said: Vec<String> = findings.into_notes().collect();
        assert_eq!(
            said,
            ["given with U = 0, as if it did not move: O1, O2, O3, O4, O5, O6, O7, O8, O9, O10 and 2 more"]
        );
    }
}
