module candent

go 1.24.0
