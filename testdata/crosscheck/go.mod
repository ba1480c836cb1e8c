module maskpair/testdata/crosscheck

go 1.26.0

require (
	github.com/crillab/gophersat v1.4.0
	github.com/google/go-cmp v0.7.0
	github.com/peterstace/simplefeatures v0.50.0
	gonum.org/v1/gonum v0.17.0
	maskpair v0.0.0
)

replace maskpair => ../..
