#pragma once

namespace thirdrung {

/// Flat LCDM whose linear matter power spectrum is wanted. Defaults: Planck Collaboration 2020, A&A 641, A6, table 2
/// (TT,TE,EE+lowE+lensing).
struct MatterModel {
  double omega_m = 0.3153;
  double omega_b_h2 = 0.02237;
  double h = 0.6736;
  double n_s = 0.9649;
  double sigma8 = 0.8111;  ///< Today, linear, in spheres of 8 Mpc/h.
  double t_cmb = 2.7255;   ///< [K] (Fixsen 2009, ApJ 707, 916).
};

/// Linear matter transfer function with baryon oscillations, T -> 1 for k -> 0: Eisenstein & Hu 1998, ApJ 496, 605,
/// eqs. 2-24.
class TransferFunction {
 public:
  explicit TransferFunction(const MatterModel& model);
  /// @param k_h_mpc wavenumber [h/Mpc].
  double operator()(double k_h_mpc) const;
  /// Sound horizon at the drag epoch [Mpc] (eq. 6).
  double sound_horizon() const { return sound_horizon_; }
  double drag_redshift() const { return z_drag_; }

 private:
  double h_, baryon_fraction_, cdm_fraction_, omega_m_h2_;
  double k_equality_, k_silk_, sound_horizon_, z_drag_;
  double alpha_c_, beta_c_, alpha_b_, beta_b_, beta_node_;
};

/// Linear matter power spectrum today [(Mpc/h)^3] against k [h/Mpc]: A k^n_s T(k)^2, A from sigma8.
class PowerSpectrum {
 public:
  explicit PowerSpectrum(const MatterModel& model = {});
  double operator()(double k_h_mpc) const;
  const MatterModel& model() const { return model_; }
  const TransferFunction& transfer() const { return transfer_; }
  /// Root mean square density contrast in spheres of radius r [Mpc/h]: sigma^2 = int dk k^2 P W^2 / (2 pi^2),
  /// W = 3 (sin x - x cos x)/x^3, x = k r (Peebles 1980).
  double sigma(double r_mpc_h) const;

 private:
  MatterModel model_;
  TransferFunction transfer_;
  double amplitude_ = 1.0;
};

/// Growth rate d ln D / d ln a = Omega_m(z)^0.55 (Linder 2005, Phys. Rev. D 72, 043529).
double growth_rate(double z, const MatterModel& model);
/// D(z)/D(0) from that rate: exp(-int f dz/(1 + z)).
double growth_factor(double z, const MatterModel& model);
/// H(z)/H0.
double hubble_ratio(double z, const MatterModel& model);

}  // namespace thirdrung
