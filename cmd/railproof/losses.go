package main

var lossesCommand = computation("losses", "losses", "losses.json",
	"losses by part and mechanism, temperatures, efficiency",
	"Computes every loss mechanism by part and the temperatures at electro-thermal equilibrium, at one\npoint, at a list of points or over a grid of input voltage, load and ambient temperature.")
