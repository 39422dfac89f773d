"""Writes data/space_groups.csv: extended Hermann-Mauguin symbols as gemmi spells them, one row for each setting.

Run from the root of the project: python tools/space_groups.py > data/space_groups.csv
Needs gemmi 0.7.5 (the symbols) and spglib 2.8.0 (the order of the 530 settings, by which the program joins rows).
"""

import gemmi
import spglib

HEADER = """\
# Settings of the space groups: extended Hermann-Mauguin symbol and Hall symbol
# units: none; `order` is the place of the setting among the 530 of International Tables, as spglib numbers them; the rows
#    behind 530 are further settings in use (F 4/m m m and the like). `standard` is 1 for the standard setting of its
#    number (unique axis b, cell choice 1; origin choice 2; hexagonal axes), else 0
# source: International Tables for Crystallography A (2002), Table 4.3.1, and B (2010), Table A1.4.2.7, as gemmi 0.7.5
#    carries them (SpaceGroup.xhm and SpaceGroup.hall)
# range: 230 space groups in 564 settings
# made by: tools/space_groups.py
# checked by: crates/lattice/src/symmetry/settings.rs (number, Hall symbol and operations of the 530 against the tables of
#    moyo 0.22); crates/lattice/tests/outside.rs (operations read from the symbols against those of gemmi)
order,number,standard,xhm,hall"""


def main():
    rest = list(gemmi.spacegroup_table())
    print(HEADER)
    for order in range(1, 531):
        there = spglib.get_spacegroup_type(order)
        alike = [s for s in rest if s.hall == there.hall_symbol and s.number == there.number]
        # Three pairs of symbols share a Hall symbol; the choice of axes tells them apart.
        choice = there.choice.lstrip("12")
        same_choice = [s for s in alike if s.qualifier == choice]
        setting = (same_choice or alike)[0]
        rest.remove(setting)
        row(order, setting)
    for order, setting in enumerate(rest, start=531):
        row(order, setting)


def row(order, setting):
    print(order, setting.number, int(setting.is_reference_setting()), setting.xhm(), setting.hall, sep=",")


if __name__ == "__main__":
    main()
