module difaudit

go 1.26

require (
	github.com/go-fonts/dejavu v0.3.2 // indirect
	github.com/goccy/go-yaml v1.19.2 // indirect
	github.com/google/go-cmp v0.7.0 // indirect
	github.com/jung-kurt/gofpdf v1.16.2 // indirect
	gonum.org/v1/gonum v0.17.0 // indirect
)
