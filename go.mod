module evenkeel

go 1.26
