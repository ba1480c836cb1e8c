module maskpair/testdata/crosscheck

go 1.26.0

require (
	github.com/peterstace/simplefeatures v0.50.0
	maskpair v0.0.0
)

replace maskpair => ../..
