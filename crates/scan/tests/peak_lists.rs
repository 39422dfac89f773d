//! What a list of lines may look like, and what becomes of it.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use proptest::prelude::{ProptestConfig, Strategy, any, prop, proptest};
use scan::peak_list::{PeakList, PositionKind, read, write};
use values::{Peak, TwoTheta, Wavelength};

/// Cu Kα1: Hölzer et al., Phys. Rev. A 56 (1997) 4554.
fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

fn list(text: &str) -> PeakList {
    read(text.as_bytes(), "list.csv", copper()).unwrap_or_else(|message| panic!("{text:?}: {message}"))
}

fn refusal(text: &str) -> String {
    read(text.as_bytes(), "list.csv", copper())
        .map(|list| panic!("{text:?} was read: {list:?}"))
        .unwrap_err()
        .to_string()
}

fn degrees(list: &PeakList) -> Vec<f64> {
    list.peaks.iter().map(|peak| (peak.two_theta.deg() * 1e6).round() / 1e6).collect()
}

fn close(found: Option<f64>, expected: f64, tolerance: f64) -> bool {
    found.is_some_and(|found| (found - expected).abs() <= tolerance)
}

#[test]
fn the_documented_form_is_read_without_a_note() {
    let list =
        list("# silicon\ntwo_theta_deg,u_two_theta_deg,intensity\n28.4412,0.0021,100 # strongest\n47.3021,,55\n");
    assert_eq!(degrees(&list), [28.4412, 47.3021]);
    assert_eq!((list.peaks[0].u_two_theta_deg, list.peaks[0].intensity), (Some(0.0021), Some(100.0)));
    assert_eq!((list.peaks[1].u_two_theta_deg, list.peaks[1].source_line), (None, 4));
    assert_eq!((list.position, list.notes.len()), (PositionKind::TwoTheta, 0), "{:?}", list.notes);
}

#[test]
fn separators_marks_encodings_and_line_ends_make_no_difference() {
    let plain = "two_theta_deg,u_two_theta_deg,intensity\n28.4412,0.0021,100.5\n47.3021,0.0023,55.0\n";
    let expected = list(plain);
    let tabs = plain.replace(',', "\t");
    let decimal = plain.replace(',', ";").replace('.', ",");
    let spreadsheet: Vec<u8> = [0xff, 0xfe].into_iter().chain(tabs.encode_utf16().flat_map(u16::to_le_bytes)).collect();
    let mut latin = b"# 25 \xb0C\n".to_vec();
    latin.extend(plain.bytes());
    for (bytes, note) in [
        (plain.replace('\n', "\r\n").into_bytes(), None),
        (plain.replace('\n', "\r").into_bytes(), None),
        (plain.trim_end().as_bytes().to_vec(), None),
        (format!("\u{feff}{plain}\u{1a}").into_bytes(), None),
        (plain.replace('\n', ",\n").into_bytes(), None),
        (plain.replace(',', " , ").into_bytes(), None),
        (plain.replace("28.4412", "\"28.4412\"").into_bytes(), None),
        (plain.replace("two_theta_deg", "Two_Theta_Deg").into_bytes(), None),
        (plain.replace("100.5", "1.005D+02").into_bytes(), None),
        (plain.replace(',', ";").into_bytes(), Some("separated by semicolons")),
        (plain.replace(',', "   ").into_bytes(), Some("separated by blanks")),
        (tabs.clone().into_bytes(), Some("separated by tabs")),
        (tabs.replacen("\t0.0021", "  0.0021", 1).into_bytes(), Some("separated by blanks")),
        (decimal.clone().into_bytes(), Some("decimal commas")),
        (spreadsheet, Some("UTF-16")),
        (latin, Some("Latin-1")),
        (plain.replacen("28.", "deg,deg,counts\n28.", 1).into_bytes(), Some("row 2 holds units")),
        (format!("Sample: plate 3\nradiation Cu\n{plain}").into_bytes(), Some("2 rows of text")),
    ] {
        let shown = String::from_utf8_lossy(&bytes).into_owned();
        let found = read(&bytes, "list.csv", copper()).unwrap_or_else(|message| panic!("{shown:?}: {message}"));
        let bare = |list: &PeakList| list.peaks.iter().map(|p| Peak { source_line: 0, ..*p }).collect::<Vec<_>>();
        assert_eq!(bare(&found), bare(&expected), "{shown:?}");
        match note {
            None => assert!(found.notes.is_empty(), "{shown:?}: {:?}", found.notes),
            Some(note) => assert!(found.notes.iter().any(|text| text.contains(note)), "{shown:?}: {:?}", found.notes),
        }
    }
}

#[test]
fn one_column_with_decimal_commas_has_one_meaning() {
    assert_eq!(degrees(&list("two_theta_deg\n28,441\n47,302\n")), [28.441, 47.302]);
}

#[test]
fn spacings_become_angles_by_braggs_law_and_their_uncertainties_too() {
    // Outside: certificate's cell of SRM 640f, a = 5.431144 Å; 111 at 28.4412°, 533 at 136.8816° for 1.5405929 Å
    // (reference table of standards computed with gemmi 0.7.5).
    let a = 5.431_144;
    let (d111, d533) = (a / 3f64.sqrt(), a / 43f64.sqrt());
    let list = list(&format!("d_A;u_d_A\n{d111:.6};0.0003\n{d533:.6};0.00001\n"));
    assert_eq!(list.position, PositionKind::D);
    assert!((list.peaks[0].two_theta.deg() - 28.4412).abs() < 1e-4);
    assert!((list.peaks[1].two_theta.deg() - 136.8816).abs() < 2e-4, "{}", list.peaks[1].two_theta.deg());
    // The definition itself, by a difference quotient.
    for (peak, d, u) in [(list.peaks[0], d111, 0.0003), (list.peaks[1], d533, 0.00001)] {
        let shifted =
            TwoTheta::from_d(d - u / 100.0, copper()).unwrap().deg() - TwoTheta::from_d(d, copper()).unwrap().deg();
        assert!(close(peak.u_two_theta_deg, shifted * 100.0, 1e-3 * shifted * 100.0), "{peak:?}");
    }
}

#[test]
fn the_digits_of_a_spacing_offer_an_uncertainty_that_is_said_and_not_used() {
    let list = list("d_A\n3.1357\n0.8283\n");
    assert!(list.peaks.iter().all(|peak| peak.u_two_theta_deg.is_none()));
    // GUM 4.3.7: half a unit over √3, 0.0000289 Å; times 2 tan θ / d.
    let by_hand = |theta: f64, d: f64| (2.0 * theta.to_radians().tan() * 0.5e-4 / 3f64.sqrt() / d).to_degrees();
    assert!(close(Some(list.digits_u_deg[0]), by_hand(14.2206, 3.1357), 1e-6), "{:?}", list.digits_u_deg);
    assert!(close(Some(list.digits_u_deg[1]), by_hand(68.44, 0.8283), 2e-5), "{:?}", list.digits_u_deg);
    assert!(list.notes.iter().any(|note| note.contains("4 digits")), "{:?}", list.notes);
}

#[test]
fn an_uncertainty_in_parentheses_counts_and_one_of_zero_does_not() {
    let list = list("two_theta_deg,u_two_theta_deg\n28.4412(21),\n47.3021,0\n56.1205,-0.002\n69.1301,nan\n");
    assert!(close(list.peaks[0].u_two_theta_deg, 0.0021, 1e-12));
    assert!(list.peaks[1..].iter().all(|peak| peak.u_two_theta_deg.is_none()));
    assert!(list.notes.iter().any(|note| note.starts_with("rows 3 and 4 have")), "{:?}", list.notes);
}

#[test]
fn parts_of_the_uncertainty_add_in_squares_where_the_total_is_missing() {
    let list = list("two_theta_deg,u_counting_deg,u_model_deg\n28.4412,0.003,0.004\n");
    assert!(close(list.peaks[0].u_two_theta_deg, 0.005, 1e-12));
    assert_eq!((list.peaks[0].u_counting_deg, list.peaks[0].u_model_deg), (Some(0.003), Some(0.004)));
}

#[test]
fn rows_without_position_are_left_out_and_named() {
    let list = list("two_theta_deg,intensity\n28.4412,100\n****,3\n,4\nnan,5\n47.3021,-\n");
    assert_eq!(degrees(&list), [28.4412, 47.3021]);
    assert_eq!(list.peaks[1].intensity, None);
    assert!(list.notes.iter().any(|note| note.starts_with("rows 3, 4 and 5 have no position")), "{:?}", list.notes);
}

#[test]
fn rows_are_sorted_and_coinciding_reflections_are_one_line() {
    let list = list("two_theta_deg,intensity\n94.9545,6\n28.4412,100\n47.3021,55\n94.9545,2\n47.3021,55\n");
    assert_eq!(degrees(&list), [28.4412, 47.3021, 94.9545]);
    assert_eq!(list.peaks[2].intensity, Some(8.0));
    assert_eq!(list.peaks[1].intensity, Some(55.0));
    let said = |words: &str| list.notes.iter().any(|note| note.contains(words));
    assert!(said("sorted") && said("row 5 have the position") && said("row 6 repeat"), "{:?}", list.notes);
}

#[test]
fn a_list_by_falling_angle_is_turned_round_without_a_word() {
    let list = list("two_theta_deg\n47.3021\n28.4412\n");
    assert_eq!((degrees(&list), list.notes.len()), (vec![28.4412, 47.3021], 0));
}

#[test]
fn unknown_columns_are_left_out_and_named_but_misspelt_ones_are_refused() {
    let list = list("h k l,two_theta_deg,remark\n1 1 1,28.4412,\"strong, sharp\"\n");
    assert_eq!(list.notes.len(), 2, "{:?}", list.notes);
    assert!(refusal("two_theta_deg,u_two_thetadeg\n28.4412,0.002\n").contains("write `u_two_theta_deg`"));
}

#[test]
fn numbers_at_the_ends_of_the_range_are_refused_and_never_become_zero_or_infinite() {
    assert!(refusal("two_theta_deg\n1e-323\n").contains("above 0°"));
    assert!(refusal("two_theta_deg\n179.99999999999999\n").contains("below 180°"));
    assert!(refusal("d_A,u_d_A\n3.1357,1e308\n").contains("an s.u. beyond the largest number"));
    let parts = "two_theta_deg,u_counting_deg,u_model_deg\n28.4412,1.7e308,1.7e308\n";
    assert!(refusal(parts).contains("an s.u. beyond the largest number"));
    let sum = "two_theta_deg,intensity\n28.4412,1.5e308\n28.4412,1.6e308\n";
    assert!(refusal(sum).contains("list.csv:3:1: the position of row 2 again"));
    let vanishing = list("d_A;u_d_A\n1e200;1e-300\n");
    assert_eq!(vanishing.peaks[0].u_two_theta_deg, None);
    assert!(vanishing.notes.iter().any(|note| note.contains("row 2 have an s.u. or a width of zero")));
}

#[test]
fn both_2theta_and_d_must_belong_to_the_wavelength() {
    let good = list("two_theta_deg,d_A\n28.4412,3.1357\n");
    assert_eq!(good.position, PositionKind::TwoTheta);
    // The mean of the copper doublet, 1.5418 Å, shows in the fourth digit of d.
    assert!(refusal("two_theta_deg,d_A\n28.4412,3.1381\n").contains("this row means 1.54"));
}

#[test]
fn a_long_line_and_a_large_file_end_in_a_message() {
    assert!(refusal(&format!("two_theta_deg\n{}", "1".repeat(1 << 20))).contains("expected"));
    assert!(refusal(&format!("two_theta_deg\n{}", "1,".repeat(1 << 19))).contains("expected"));
    assert!(refusal(&format!("two_theta_deg,{}\n1\n", "a,".repeat(1 << 19))).contains("expected"));
    assert!(refusal(&"two_theta_deg\n28.44\n".repeat(300_000)).contains("at most 4194304 bytes"));
}

fn peaks() -> impl Strategy<Value = Vec<Peak>> {
    let option = || prop::option::of(1e-5f64..1.0);
    let line = (1.0f64..179.0, option(), option(), option(), prop::option::of(-10.0f64..1e7), option());
    prop::collection::vec(line, 1..40).prop_map(|lines| {
        let mut peaks: Vec<Peak> = lines
            .into_iter()
            .map(|(deg, u, counting, model, strength, fwhm_deg)| Peak {
                u_two_theta_deg: u,
                u_counting_deg: u.and(counting),
                u_model_deg: u.and(model),
                intensity: strength,
                area: strength.map(|s| s / 7.0),
                fwhm_deg,
                ..Peak::at(TwoTheta::from_deg((deg * 1e4).round() / 1e4))
            })
            .collect();
        peaks.sort_by(|a, b| a.two_theta.rad().total_cmp(&b.two_theta.rad()));
        peaks.dedup_by(|a, b| (a.two_theta.deg() - b.two_theta.deg()).abs() < 1e-5);
        peaks
    })
}

const GOOD: &str = "two_theta_deg;u_two_theta_deg;d_A;intensity\n28,4412;0,0021;3,1357;100\n47,3021(3);;1,9202;55\n";

proptest! {
    // Counterexamples that are found become tests of their own; no file is written into the tree.
    #![proptest_config(ProptestConfig { cases: 512, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn what_is_written_is_read_back_the_same(peaks in peaks()) {
        let text = write(&peaks, copper());
        let read = list(&text);
        assert_eq!(read.peaks.len(), peaks.len());
        let same = |a: Option<f64>, b: Option<f64>| match (a, b) {
            (Some(a), Some(b)) => (a - b).abs() <= 1e-6 * b.abs(),
            (a, b) => a.is_none() && b.is_none(),
        };
        for (found, written) in read.peaks.iter().zip(&peaks) {
            assert!((found.two_theta.deg() - written.two_theta.deg()).abs() < 1e-7);
            assert!(same(found.u_two_theta_deg, written.u_two_theta_deg), "{found:?} {written:?}");
            assert!(same(found.u_counting_deg, written.u_counting_deg), "{found:?} {written:?}");
            assert!(same(found.u_model_deg, written.u_model_deg), "{found:?} {written:?}");
            assert!(same(found.intensity, written.intensity), "{found:?} {written:?}");
            assert!(same(found.area, written.area), "{found:?} {written:?}");
            assert!(same(found.fwhm_deg, written.fwhm_deg), "{found:?} {written:?}");
        }
    }

    #[test]
    fn no_bytes_make_the_readers_panic(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        let _ = read(&bytes, "any", copper()).map(|list| check(&list));
        let _ = scan::batch_log::read(&bytes, "any");
    }

    #[test]
    fn no_damage_to_a_good_list_makes_the_reader_panic(
        edits in prop::collection::vec((0usize..GOOD.len(), prop::option::of(prop::sample::select(b"0,;.\t\"#-()eEdD \n\r*\xb0\0".to_vec()))), 1..6)
    ) {
        let mut bytes = GOOD.as_bytes().to_vec();
        for (at, byte) in edits {
            let at = at.min(bytes.len().saturating_sub(1));
            match byte {
                Some(byte) => bytes[at] = byte,
                None => { bytes.remove(at); }
            }
        }
        match read(&bytes, "damaged", copper()) {
            Ok(list) => check(&list),
            Err(message) => assert!(message.location.is_some() && !message.mend.is_empty(), "{message}"),
        }
    }
}

/// What holds for every list that is read.
fn check(list: &PeakList) {
    assert_eq!(list.peaks.len(), list.digits_u_deg.len());
    assert!(list.peaks.windows(2).all(|pair| pair[0].two_theta < pair[1].two_theta));
    for peak in &list.peaks {
        assert!(peak.two_theta.deg() > 0.0 && peak.two_theta.deg() < 180.0, "{peak:?}");
        for u in [peak.u_two_theta_deg, peak.u_counting_deg, peak.u_model_deg, peak.fwhm_deg].into_iter().flatten() {
            assert!(u > 0.0 && u.is_finite(), "{peak:?}");
        }
    }
}
