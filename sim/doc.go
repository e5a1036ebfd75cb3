// Package sim is the map of the core: pure Go, no browser, no clock, no global chance.
//
//	law       distributions of energies (fitness laws)
//	bose      ground integral, chemical potential, condensate, occupation, thresholds
//	growth    the growing network and its levers, by keyed draws
//	share     leader, CR4, HHI, Gini, lead changes
//	standing  regime and margin in words
//	evidence  from a link log to a verdict
//	outlook   many runs forward, in mergeable parts
//	casebook  the document, its limits, its link and its file
//	wire      packets between page, engine and stage
//	service   request to reply, in slices; the only recover
//
// A member is an energy level, a link a particle: energy eps = -ln(fitness)/beta.
package sim
