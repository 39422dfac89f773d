//! The table of known settings: `data/space_groups.csv` joined with the full symbols of moyo's table.
//!
//! moyo's own parsers see only moyo's own texts: they panic or run long on others.

use std::sync::LazyLock;

use moyo::data::hall_symbol_entry;
use values::Table;

/// One setting of a space group.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Setting {
    /// Number of the space-group type, 1..=230.
    pub number: u16,
    /// Whether it is the standard setting of its number.
    pub standard: bool,
    /// Extended H–M symbol, such as `R -3 c:H`.
    pub xhm: &'static str,
    /// Hall symbol.
    pub hall: &'static str,
    /// Full H–M symbol with e for the double glide, such as `C 2/m 2/c 21/e`; empty beyond the 530.
    pub full: String,
    /// Mark of axes and origin among the settings of a number, such as `-b2` or `2cab`; empty beyond the 530.
    pub choice: &'static str,
}

impl Setting {
    /// Symbol without its mark: `R -3 c`.
    pub(crate) fn plain(&self) -> &'static str {
        self.xhm.split(':').next().unwrap_or(self.xhm)
    }

    /// Mark of origin or axes: `1`, `2`, `H`, `R`.
    pub(crate) fn mark(&self) -> Option<&'static str> {
        self.xhm.split_once(':').map(|(_, mark)| mark)
    }
}

const TEXT: &str = include_str!("../../../../data/space_groups.csv");

/// All known settings in the order of the table: the 530 first.
pub(crate) static SETTINGS: LazyLock<Vec<Setting>> = LazyLock::new(|| {
    // The table is part of the program: a test reads it with all its checks, and a broken one yields no settings.
    let Ok(table) = Table::parse(TEXT, "data/space_groups.csv") else { return Vec::new() };
    table.rows.iter().filter_map(|row| setting(&row.fields)).collect()
});

/// Columns: order, number, standard, xhm, hall.
fn setting(fields: &[&'static str]) -> Option<Setting> {
    let [order, number, standard, xhm, hall] = fields else { return None };
    let entry = order.parse().ok().filter(|order| (1..=530).contains(order)).and_then(hall_symbol_entry);
    Some(Setting {
        number: number.parse().ok()?,
        standard: *standard == "1",
        xhm,
        hall,
        full: entry.as_ref().map(|e| e.hm_full.replace('_', "")).unwrap_or_default(),
        choice: entry.map(|e| e.setting).unwrap_or_default(),
    })
}

#[cfg(test)]
mod tests {
    use super::{SETTINGS, TEXT};
    use moyo::data::{Setting as MoyoSetting, hall_symbol_entry, operations_from_number};
    use values::Table;

    use crate::{Operation, SpaceGroup};

    #[test]
    fn the_table_has_its_origin_and_every_row_is_read() {
        let table = Table::parse(TEXT, "data/space_groups.csv").unwrap();
        assert_eq!((table.rows.len(), SETTINGS.len()), (564, 564));
        assert_eq!(table.columns, ["order", "number", "standard", "xhm", "hall"]);
        let standard: Vec<u16> = SETTINGS.iter().filter(|s| s.standard).map(|s| s.number).collect();
        assert_eq!(standard, (1..=230).collect::<Vec<u16>>());
    }

    #[test]
    fn the_530_rows_stand_beside_the_same_setting_in_the_table_of_moyo() {
        // Outside: the table of moyo 0.22, which writes `=` for `"`.
        for (order, setting) in (1..=530).zip(SETTINGS.iter()) {
            let entry = hall_symbol_entry(order).unwrap();
            assert_eq!(i32::from(setting.number), entry.number, "{}", setting.xhm);
            assert_eq!(setting.hall, entry.hall_symbol.replace('=', "\""), "{}", setting.xhm);
        }
    }

    #[test]
    fn the_530_settings_have_the_operations_of_moyo() {
        // Outside: moyo 0.22, which has a reader of Hall symbols and a closure of its own.
        for (order, setting) in (1..=530).zip(SETTINGS.iter()) {
            let theirs =
                operations_from_number(i32::from(setting.number), MoyoSetting::HallNumber(order), false).unwrap();
            let mut theirs: Vec<Operation> = theirs
                .iter()
                .map(|o| Operation {
                    rotation: std::array::from_fn(|i| std::array::from_fn(|j| o.rotation[(i, j)] as i8)),
                    translation: std::array::from_fn(|i| ((o.translation[i] * 24.0).round() as i32).rem_euclid(24)),
                })
                .collect();
            let mut ours = SpaceGroup::from_setting(setting).operations().to_vec();
            theirs.sort_unstable();
            ours.sort_unstable();
            assert_eq!(ours, theirs, "{}", setting.xhm);
        }
    }
}
