package main

var cornersCommand = computation("corners", "corners", "corners.json",
	"worst case over tolerances, conditions and age",
	"Searches the worst point of every limited quantity, estimates it linearly, draws built units and\ntells which tolerances make it: what fails first, where, by how much, and how sure that is.")
