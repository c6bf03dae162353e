module swaybook/kernel/generate

go 1.26.0

require github.com/mmcloughlin/avo v0.6.0

require (
	golang.org/x/mod v0.42.0 // indirect
	golang.org/x/sync v0.24.0 // indirect
	golang.org/x/tools v0.52.0 // indirect
)
