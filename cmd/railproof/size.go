package main

var sizeCommand = computation("size", "sizing", "sizing.json",
	"value windows, ratings and a draft stage from a requirement",
	"Sizes a power stage for a requirement: windows of values and the corner that set each, ratings that\nevery part must carry, preferred values, and a draft stage that can be posted on.")
