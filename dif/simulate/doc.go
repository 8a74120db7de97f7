// Package simulate makes item responses under a stated model, stated groups and
// planted differential item functioning, with the truth beside them.
//
// A [Design] says what to make; [New] checks it and draws the item parameters that it
// leaves open; [Simulation.Candidates] gives one candidate after another without
// holding them all; [Simulation.Truth] tells what was planted.
//
// # Model
//
// Abilities are normal within a group. The first group is the reference group, the
// others are focal groups. With D = 1 an item is answered correctly with probability
//
//	P(θ) = c + (1 - c) / (1 + exp(-a (θ - b)))
//
// (c = 0 under the two-parameter and the Rasch model, and one common a under the
// latter), independently of other items given θ.
//
// # Sign
//
// A negative D-DIF means that the item is harder for the focal group than for
// reference candidates of the same ability.
//
// # Randomness
//
// All random numbers come from the seed. Item parameters, keys, abilities, answers,
// chosen options, blanks and external scores have streams of their own, one for each
// item or candidate. So more candidates, another group or one more item at the end
// leave all other values as they were, raw choices scored by their key equal the
// scored answers of the same seed, and blanks only cover answers that would else
// have been there.
package simulate
