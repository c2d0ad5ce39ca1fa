"""The caution that the README, every workbook and every report show."""

CAUTION = (
    "xlaxial aids design and checking by a competent engineer; loads, factors and resistances are to be taken from the "
    "code in force where the work is built, and results are to be reviewed under the licence or registration that the "
    "place requires."
)
