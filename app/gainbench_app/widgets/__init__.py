"""Small parts that the columns share; none of them knows a sheet."""
