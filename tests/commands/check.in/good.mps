NAME
OBJSENSE
    MAX
ROWS
 N aim
 L resources.kiln
COLUMNS
    floor_tile aim 21
    floor_tile resources.kiln 0.02
RHS
    RHS resources.kiln 168
BOUNDS
ENDATA
