package result

//go:generate go test -run ^TestSchemaFileIsFresh$ . -regen
