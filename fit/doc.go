// Package fit turns readings into a temperature, an emissivity and a statement of how
// far to trust both.
//
// An Estimator is compiled once from bands and assumptions (New). Each reading is then
// estimated by one weighted least-squares problem in which everything known enters with
// its standard uncertainty. The temperature is the only stiff unknown, so the engine is
// one function, the curve χ²(T) with everything else eliminated: its minima are the
// basins, its crossings the interval.
//
//	s_i = f_i( d_i + g_i·[ ∫R_i(λ) X(λ) dλ / ∫R_i dλ + stray_i ] ) + noise
//	X = τ·( φ·(ε L(T) + (1 − ε) L_s) + (1 − φ) L_rest ) + L_path
//
// Every known number in it is an input with a standard uncertainty (packages detector and
// sightline describe them); what the readings share is one unknown η with a prior.
//
// A surface of few parameters, a family or a model of package emissivity, gets a profile
// interval. A surface that nobody characterised is a process, a random curve: there the
// engine integrates over the curve, and what comes out is the posterior of T, flat over the
// range beforehand.
//
// # Symbols
//
//	s   reading, W m⁻² sr⁻¹ m⁻¹ (or any one unit, where the level is declared relative)
//	f, d, g  linearity, dark level, gain × exposure of a channel
//	τ, φ     transmittance of the path, fraction of the field that the target fills
//	L_s      radiance that the surface reflects; L_rest, L_path of the rest and the path
//	T   temperature, K; β = 1/T
//	ε   emissivity; θ the parameters of its family
//	η   shared inputs in units of their standard uncertainty, N(0, 1)
//	u   standard uncertainty
//
// # What it does not do
//
// It assumes an opaque surface. It is no safety interlock: what it returns is a reading with a stated
// uncertainty, and the assumptions that it rests on are named beside it.
//
// An Estimator is immutable and safe for concurrent use; a Work is not.
package fit
