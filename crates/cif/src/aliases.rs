//! Data names of crystal structures and powder data: old and new spellings, one internal name.
//!
//! The core dictionary has had several names for one thing, and writes them with underscores alone or with a dot behind
//! the category: `_symmetry_Int_Tables_number`, `_space_group_IT_number`, `_space_group.IT_number`. The internal name
//! is the newest one with the dot. Names count whatever their case.
//!
//! [`canonical`] goes from a tag in a file to the internal name; [`find`] and [`loop_of`] from an internal name to what a
//! block has under any of its spellings.
//!
//! Source: core dictionary CIF_CORE 3.4.0 and powder dictionary CIF_POW 2.5.0 (2025-07-15), their names and aliases.

use crate::block::Block;
use crate::loops::{Column, Loop};

/// One internal name with every spelling that stands for it, the internal one first.
type Alias = &'static [&'static str];

/// Dotted name, the same with underscores, then older names.
macro_rules! alias {
    ($category:literal, $object:literal $(, $old:literal)*) => {
        &[concat!("_", $category, ".", $object), concat!("_", $category, "_", $object) $(, $old)*]
    };
}

#[rustfmt::skip]
const CORE: &[Alias] = &[
    // Cell: Å, degrees; `_su` holds the s.u. where it stands apart.
    alias!("cell", "length_a"),
    alias!("cell", "length_b"),
    alias!("cell", "length_c"),
    alias!("cell", "angle_alpha"),
    alias!("cell", "angle_beta"),
    alias!("cell", "angle_gamma"),
    alias!("cell", "length_a_su"),
    alias!("cell", "length_b_su"),
    alias!("cell", "length_c_su"),
    alias!("cell", "angle_alpha_su"),
    alias!("cell", "angle_beta_su"),
    alias!("cell", "angle_gamma_su"),
    // Å³; formula units in the cell; K.
    alias!("cell", "volume"),
    alias!("cell", "volume_su"),
    alias!("cell", "formula_units_Z"),
    alias!("cell_measurement", "temperature"),
    // Symmetry.
    alias!("space_group", "name_H-M_alt", "_symmetry_space_group_name_H-M"),
    alias!("space_group", "name_H-M_full"),
    alias!("space_group", "name_H-M_ref"),
    alias!("space_group", "name_Hall", "_symmetry_space_group_name_Hall"),
    alias!("space_group", "IT_number", "_symmetry_Int_Tables_number"),
    alias!("space_group", "crystal_system", "_symmetry_cell_setting"),
    alias!("space_group_symop", "operation_xyz", "_symmetry_equiv_pos_as_xyz"),
    alias!("space_group_symop", "id", "_symmetry_equiv_pos_site_id"),
    // Atoms: fractions of the cell edges, Å, Å².
    alias!("atom_site", "label"),
    alias!("atom_site", "type_symbol"),
    alias!("atom_site", "fract_x"),
    alias!("atom_site", "fract_y"),
    alias!("atom_site", "fract_z"),
    alias!("atom_site", "Cartn_x"),
    alias!("atom_site", "Cartn_y"),
    alias!("atom_site", "Cartn_z"),
    alias!("atom_site", "occupancy"),
    alias!("atom_site", "U_iso_or_equiv"),
    alias!("atom_site", "B_iso_or_equiv"),
    alias!("atom_site", "ADP_type", "_atom_site_thermal_displace_type"),
    alias!("atom_site", "site_symmetry_multiplicity", "_atom_site_symmetry_multiplicity"),
    alias!("atom_site", "Wyckoff_symbol"),
    alias!("atom_site", "disorder_group"),
    alias!("atom_site", "disorder_assembly"),
    alias!("atom_site", "calc_flag"),
    // Displacement tensors: Å².
    alias!("atom_site_aniso", "label"),
    alias!("atom_site_aniso", "U_11"),
    alias!("atom_site_aniso", "U_22"),
    alias!("atom_site_aniso", "U_33"),
    alias!("atom_site_aniso", "U_12"),
    alias!("atom_site_aniso", "U_13"),
    alias!("atom_site_aniso", "U_23"),
    alias!("atom_site_aniso", "B_11"),
    alias!("atom_site_aniso", "B_22"),
    alias!("atom_site_aniso", "B_33"),
    alias!("atom_site_aniso", "B_12"),
    alias!("atom_site_aniso", "B_13"),
    alias!("atom_site_aniso", "B_23"),
    // Scattering of each kind of atom: electrons.
    alias!("atom_type", "symbol"),
    alias!("atom_type_scat", "dispersion_real"),
    alias!("atom_type_scat", "dispersion_imag"),
    alias!("atom_type_scat", "source"),
    alias!("atom_type_scat", "Cromer_Mann_a1"),
    alias!("atom_type_scat", "Cromer_Mann_a2"),
    alias!("atom_type_scat", "Cromer_Mann_a3"),
    alias!("atom_type_scat", "Cromer_Mann_a4"),
    alias!("atom_type_scat", "Cromer_Mann_b1"),
    alias!("atom_type_scat", "Cromer_Mann_b2"),
    alias!("atom_type_scat", "Cromer_Mann_b3"),
    alias!("atom_type_scat", "Cromer_Mann_b4"),
    alias!("atom_type_scat", "Cromer_Mann_c"),
    // Formula, its mass in Da, density in Mg m⁻³.
    alias!("chemical_formula", "sum"),
    alias!("chemical_formula", "weight"),
    alias!("exptl_crystal", "density_diffrn"),
    // Radiation: Å, relative weight; temperature in K.
    alias!("diffrn_radiation_wavelength", "value", "_diffrn_radiation_wavelength"),
    alias!("diffrn_radiation_wavelength", "wt"),
    alias!("diffrn_radiation_wavelength", "id"),
    alias!("diffrn_radiation", "type"),
    alias!("diffrn_radiation", "monochromator"),
    alias!("diffrn", "ambient_temperature"),
];

// Angles 2θ in degrees, d in Å, counts; see the powder dictionary for each.
#[rustfmt::skip]
const POWDER: &[Alias] = &[
    alias!("pd_meas", "2theta_scan", "_pd_meas_angle_2theta"),
    alias!("pd_meas", "2theta_range_min"),
    alias!("pd_meas", "2theta_range_max"),
    alias!("pd_meas", "2theta_range_inc"),
    alias!("pd_meas", "2theta_fixed"),
    alias!("pd_meas", "counts_total"),
    alias!("pd_meas", "counts_background"),
    alias!("pd_meas", "counts_container"),
    alias!("pd_meas", "counts_monitor"),
    alias!("pd_meas", "intensity_total"),
    alias!("pd_meas", "intensity_background"),
    alias!("pd_meas", "intensity_container"),
    alias!("pd_meas", "intensity_monitor"),
    alias!("pd_meas", "units_of_intensity"),
    alias!("pd_meas", "step_count_time"),
    alias!("pd_meas", "number_of_points"),
    alias!("pd_meas", "point_id"),
    alias!("pd_meas", "scan_method"),
    alias!("pd_meas", "rocking_axis"),
    alias!("pd_meas", "rocking_angle"),
    alias!("pd_meas", "datetime_initiated"),
    alias!("pd_proc", "2theta_corrected"),
    alias!("pd_proc", "2theta_range_min"),
    alias!("pd_proc", "2theta_range_max"),
    alias!("pd_proc", "2theta_range_inc"),
    alias!("pd_proc", "d_spacing"),
    alias!("pd_proc", "recip_len_Q"),
    alias!("pd_proc", "wavelength"),
    alias!("pd_proc", "intensity_total"),
    alias!("pd_proc", "intensity_net"),
    alias!("pd_proc", "intensity_norm"),
    alias!("pd_proc", "intensity_incident"),
    alias!("pd_proc", "intensity_bkg_calc"),
    alias!("pd_proc", "intensity_bkg_fix"),
    alias!("pd_proc", "ls_weight"),
    alias!("pd_proc", "info_excluded_regions"),
    alias!("pd_proc", "point_id"),
    alias!("pd_calc", "intensity_total"),
    alias!("pd_calc", "intensity_net"),
    alias!("pd_calc", "intensity_bkg"),
    alias!("pd_calc", "point_id"),
    alias!("pd_calc", "method"),
    alias!("pd_peak", "id"),
    alias!("pd_peak", "2theta_centroid"),
    alias!("pd_peak", "2theta_maximum"),
    alias!("pd_peak", "d_spacing"),
    alias!("pd_peak", "intensity"),
    alias!("pd_peak", "pk_height"),
    alias!("pd_peak", "width_2theta"),
    alias!("pd_peak", "width_d_spacing"),
    alias!("pd_peak", "wavelength_id"),
    alias!("pd_peak", "special_details"),
    alias!("pd_phase", "id"),
    alias!("pd_phase", "name"),
    alias!("pd_phase", "mass_%"),
    alias!("pd_spec", "mount_mode"),
    alias!("pd_spec", "shape"),
    alias!("pd_spec", "orientation"),
    alias!("pd_spec", "size_axial"),
    alias!("pd_spec", "size_equat"),
    alias!("pd_spec", "size_thick"),
    alias!("pd_instr", "geometry"),
    alias!("pd_instr", "location"),
    alias!("pd_instr", "dist_src_spec", "_pd_instr_dist_src/spec"),
    alias!("pd_instr", "dist_spec_detc", "_pd_instr_dist_spec/detc"),
    alias!("pd_instr", "dist_src_mono", "_pd_instr_dist_src/mono"),
    alias!("pd_instr", "dist_mono_spec", "_pd_instr_dist_mono/spec"),
    alias!("pd_instr", "divg_eq_src_spec", "_pd_instr_divg_eq_src/spec"),
    alias!("pd_instr", "divg_ax_src_spec", "_pd_instr_divg_ax_src/spec"),
    alias!("pd_instr", "soller_ax_src_spec", "_pd_instr_soller_ax_src/spec"),
    alias!("pd_instr", "soller_ax_spec_detc", "_pd_instr_soller_ax_spec/detc"),
    alias!("pd_instr", "cons_illum_flag"),
    alias!("pd_instr", "cons_illum_len"),
    alias!("pd_instr", "var_illum_len"),
    alias!("pd_instr", "monochr_pre_spec"),
    alias!("pd_instr", "monochr_post_spec"),
    alias!("pd_instr", "2theta_monochr_pre"),
    alias!("pd_instr", "2theta_monochr_post"),
    alias!("pd_calib", "2theta_offset"),
    alias!("pd_calib", "2theta_off_point"),
    alias!("pd_calib", "2theta_off_min"),
    alias!("pd_calib", "2theta_off_max"),
    alias!("pd_char", "atten_coef_mu_calc"),
    alias!("pd_char", "atten_coef_mu_obs"),
    alias!("pd_prep", "temperature"),
    alias!("pd_prep", "pressure"),
    alias!("pd_prep", "conditions"),
    alias!("pd_pref_orient_March_Dollase", "r"),
    alias!("pd_pref_orient_March_Dollase", "index_h"),
    alias!("pd_pref_orient_March_Dollase", "index_k"),
    alias!("pd_pref_orient_March_Dollase", "index_l"),
    alias!("pd_pref_orient_March_Dollase", "fract"),
    alias!("pd_refln", "peak_id"),
    alias!("pd_refln", "phase_id"),
    alias!("refln", "wavelength_id", "_pd_refln_wavelength_id"),
    alias!("refln", "index_h"),
    alias!("refln", "index_k"),
    alias!("refln", "index_l"),
    alias!("refln", "d_spacing"),
    alias!("refln", "F_squared_calc"),
    alias!("refln", "F_squared_meas"),
    alias!("refln", "intensity_calc"),
    alias!("refln", "symmetry_multiplicity"),
];

/// Tables of the core and powder names, looked through in this order.
const ALL: [&[Alias]; 2] = [CORE, POWDER];

fn aliases() -> impl Iterator<Item = Alias> {
    ALL.into_iter().flatten().copied()
}

/// The internal name of a tag, whatever its case and spelling: `_symmetry_Int_Tables_number` gives
/// `_space_group.IT_number`. `None` for tags that are not in the tables.
#[must_use]
pub fn canonical(tag: &str) -> Option<&'static str> {
    aliases().find(|names| names.iter().any(|name| name.eq_ignore_ascii_case(tag))).map(|names| names[0])
}

/// Every spelling of an internal name, itself first; the name alone is none when it is not in the tables.
#[must_use]
pub fn spellings(internal: &str) -> &'static [&'static str] {
    aliases().find(|names| names[0].eq_ignore_ascii_case(internal)).unwrap_or(&[])
}

/// The values that a block has under any spelling of an internal name, with the tag as it is found there: the column of
/// a loop, or the one value of an item. The first spelling in the order of [`spellings`] counts.
#[must_use]
pub fn find<'a>(block: Block<'a>, internal: &str) -> Option<(&'static str, Column<'a>)> {
    spellings(internal).iter().find_map(|tag| Some((*tag, block.column(tag)?)))
}

/// The loop of a block that has an internal name under any of its spellings.
#[must_use]
pub fn loop_of<'a>(block: Block<'a>, internal: &str) -> Option<Loop<'a>> {
    spellings(internal).iter().find_map(|tag| block.loop_of(tag))
}

/// The column of a loop with an internal name under any of its spellings.
#[must_use]
pub fn column<'a>(found: Loop<'a>, internal: &str) -> Option<Column<'a>> {
    spellings(internal).iter().find_map(|tag| found.column(tag))
}

#[cfg(test)]
mod tests {
    use std::collections::HashSet;

    use super::{aliases, canonical, find, spellings};

    #[test]
    fn no_spelling_stands_for_two_things() {
        let mut seen = HashSet::new();
        for name in aliases().flatten() {
            assert!(seen.insert(name.to_ascii_lowercase()), "{name} occurs twice");
            assert!(name.starts_with('_') && name.len() <= 75, "{name}");
        }
    }

    #[test]
    fn old_and_new_names_have_one_internal_name() {
        // Outside: CIF_CORE 3.4.0, the alias entries of each definition.
        for (tag, internal) in [
            ("_cell_length_a", "_cell.length_a"),
            ("_CELL.LENGTH_A", "_cell.length_a"),
            ("_symmetry_space_group_name_H-M", "_space_group.name_H-M_alt"),
            ("_space_group_name_H-M_alt", "_space_group.name_H-M_alt"),
            ("_symmetry_space_group_name_Hall", "_space_group.name_Hall"),
            ("_symmetry_Int_Tables_number", "_space_group.IT_number"),
            ("_symmetry_cell_setting", "_space_group.crystal_system"),
            ("_symmetry_equiv_pos_as_xyz", "_space_group_symop.operation_xyz"),
            ("_atom_site_adp_type", "_atom_site.ADP_type"),
            ("_atom_site_thermal_displace_type", "_atom_site.ADP_type"),
            ("_atom_site_symmetry_multiplicity", "_atom_site.site_symmetry_multiplicity"),
            ("_atom_site_aniso_u_12", "_atom_site_aniso.U_12"),
            ("_atom_type_scat_Cromer_Mann_a1", "_atom_type_scat.Cromer_Mann_a1"),
            ("_diffrn_radiation_wavelength", "_diffrn_radiation_wavelength.value"),
            ("_diffrn_radiation_wavelength_wt", "_diffrn_radiation_wavelength.wt"),
            ("_pd_meas_angle_2theta", "_pd_meas.2theta_scan"),
            ("_pd_instr_dist_src/spec", "_pd_instr.dist_src_spec"),
            ("_pd_refln_wavelength_id", "_refln.wavelength_id"),
        ] {
            assert_eq!(canonical(tag), Some(internal), "{tag}");
            assert_eq!(spellings(internal)[0], internal);
        }
        assert_eq!(canonical("_no_such_name"), None);
        assert!(spellings("_no_such_name").is_empty());
    }

    #[test]
    fn a_value_is_found_under_whatever_spelling_the_file_has() {
        for tag in ["_space_group_IT_number", "_Space_Group.it_number", "_symmetry_int_tables_number"] {
            let document = crate::parse(format!("data_x {tag} 227").as_bytes(), "x.cif").unwrap();
            let (_, column) = find(document.blocks().next().unwrap(), "_space_group.IT_number").unwrap();
            assert_eq!(column.get(0).unwrap().text().unwrap(), "227");
        }
    }
}
