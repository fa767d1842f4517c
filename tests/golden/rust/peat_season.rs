// The model `peat_season`, compiled by driftwright 0.1.0.
// Change the model file rather than this one: it is written anew whenever the model changes.

#[forbid(unsafe_code)]
#[allow(
    dead_code,
    non_snake_case,
    unreachable_pub,
    clippy::approx_constant,
    clippy::doc_markdown,
    clippy::excessive_precision,
    clippy::float_cmp,
    clippy::inline_always,
    clippy::let_and_return,
    clippy::many_single_char_names,
    clippy::needless_range_loop,
    clippy::similar_names,
    clippy::too_many_lines,
    clippy::unreadable_literal
)]
pub mod peat_season {
    //! Price of peat briquettes with a heating season
    //!
    //! log(P) is a season f(t) = level + swing\*cos(2\*pi\*t) and an Ornstein-Uhlenbeck process around 0 (the one-factor model of Lucia & Schwartz 2002, section 4.1,
    //! equations 7 to 12, from memory). Written for the price itself: kappa\*(b - log(P))\*P with b = f + f'/kappa + sigma^2/(2\*kappa).

    use ::driftwright_runtime as runtime;
    const _: () = runtime::require_version::<runtime::Version<0, 1>>();

    /// The places of the observed quantities among the outputs.
    pub mod quantity {
        /// State `P`: price, in `EUR/t`.
        pub const P: usize = 0;
        /// Derived quantity `log_P`, `log(P)`.
        pub const LOG_P: usize = 1;
    }

    /// The parameters of the model.
    #[derive(Clone, Copy, Debug, PartialEq)]
    pub struct Parameters {
        /// `P0`, in `EUR/t`; in `(0, inf)`; 90.0 where not given.
        pub P0: f64,
        /// mean of the log price over a year; in `(-inf, inf)`; 4.4 where not given.
        pub level: f64,
        /// how far the season moves it; in `(-inf, inf)`; 0.25 where not given.
        pub swing: f64,
        /// `kappa`, in `1/year`; in `(0, inf)`; 2.5 where not given.
        pub kappa: f64,
        /// `sigma`, in `1/year^(1/2)`; in `(0, inf)`; 0.5 where not given.
        pub sigma: f64,
        /// length of the seasons, in `year`; in `(0, inf)`; 1.0 where not given.
        pub year: f64,
    }

    impl Default for Parameters {
        /// The model's own values.
        fn default() -> Self {
            Self {
                P0: 90.0,
                level: 4.4,
                swing: 0.25,
                kappa: 2.5,
                sigma: 0.5,
                year: 1.0,
            }
        }
    }

    /// A simulator of `peat_season`: the model with its parameters.
    #[derive(Clone, Debug)]
    pub struct PeatSeason {
        parameters: Parameters,
        v11: f64,
        v13: f64,
        v18: f64,
        v20: f64,
        v21: f64,
        v25: f64,
        v35: f64,
    }

    impl PeatSeason {
        /// A simulator with these parameters.
        ///
        /// # Errors
        /// A parameter that is not finite or outside its range, an assumption that does not
        /// hold, a state that starts outside its domain, contradictory correlations.
        pub fn new(parameters: Parameters) -> Result<Self, runtime::ParameterError> {
            let p0 = parameters.P0;
            let level = parameters.level;
            let swing = parameters.swing;
            let kappa = parameters.kappa;
            let sigma = parameters.sigma;
            let year = parameters.year;
            runtime::check_range(
                "P0",
                parameters.P0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "level",
                parameters.level,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "swing",
                parameters.swing,
                runtime::Interval::new(f64::NEG_INFINITY, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "kappa",
                parameters.kappa,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "sigma",
                parameters.sigma,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_range(
                "year",
                parameters.year,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            runtime::check_initial(
                "P",
                p0,
                runtime::Interval::new(0.0, false, f64::INFINITY, false),
            )?;
            let v11 = -kappa;
            let v13 = 6.283185307179586 / year;
            let v17 = swing * 6.283185307179586;
            let v18 = v17 / year;
            let v20 = level * kappa;
            let v21 = swing * kappa;
            let v25 = sigma * sigma;
            let v35 = runtime::math::ln::<runtime::Unfused>(p0);
            Ok(Self {
                parameters,
                v11,
                v13,
                v18,
                v20,
                v21,
                v25,
                v35,
            })
        }

        /// The parameters it was constructed with.
        #[must_use]
        pub const fn parameters(&self) -> &Parameters {
            &self.parameters
        }
    }

    impl runtime::Simulator for PeatSeason {
        fn shape(&self) -> runtime::Shape<'_> {
            static SOURCES: [runtime::Source; 1] = [runtime::Source::new("W")];
            static OUTPUTS: [::std::borrow::Cow<'static, str>; 2] = [
                ::std::borrow::Cow::Borrowed("P"),
                ::std::borrow::Cow::Borrowed("log_P"),
            ];
            runtime::Shape {
                states: 1,
                step_values: 3,
                step_scratch: 0,
                sources: &SOURCES,
                outputs: &OUTPUTS,
                observation_values: 0,
                observation_scratch: 0,
                left_domain: None,
                time_dependent: true,
                approximate: false,
            }
        }

        fn start(&self, states: &mut [f64]) {
            let v35 = self.v35;
            states.copy_from_slice(&[v35]);
        }

        fn step_values(
            &self,
            start: f64,
            length: f64,
            values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            let v11 = self.v11;
            let v13 = self.v13;
            let v18 = self.v18;
            let v20 = self.v20;
            let v21 = self.v21;
            let v25 = self.v25;
            let mut v27 = ([0.0; 1], [0.0; 1], [0.0; 1]);
            runtime::gauss::moving_transition(
                1,
                start,
                length,
                |instant, coefficients| {
                    let v14 = instant * v13;
                    let v15 = runtime::math::cos::<runtime::Unfused>(v14);
                    let v16 = runtime::math::sin::<runtime::Unfused>(v14);
                    let v19 = v16 * v18;
                    let v22 = v15 * v21;
                    let v23 = v20 - v19;
                    let v24 = v22 + v23;
                    coefficients.copy_from_slice(&[v11, v24, v25]);
                },
                &mut v27.0,
                &mut v27.1,
                &mut v27.2,
            )?;
            let v28 = v27.2[0];
            // Standard deviation that the normal draw `W` gives log(P) over a step.
            let deviation_p_w = runtime::math::sqrt::<runtime::Unfused>(v28);
            let shift_p = v27.1[0];
            let transition_p_p = v27.0[0];
            values.copy_from_slice(&[deviation_p_w, shift_p, transition_p_p]);
            Ok(())
        }

        fn observation_values(
            &self,
            _time: f64,
            _values: &mut [f64],
        ) -> Result<(), runtime::StepError> {
            Ok(())
        }

        #[inline(always)]
        fn step<A: runtime::Arith>(
            &self,
            values: &[f64],
            states: &mut [runtime::Lane],
            noise: &[runtime::Lane],
            _draws: &runtime::random::Draws,
            _scratch: &mut [runtime::Lane],
        ) {
            let &[deviation_p_w, shift_p, transition_p_p] = values else {
                unreachable!("the driver passes as many values as the shape says")
            };
            let [slot_p] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [normal_w] = noise else {
                unreachable!(
                    "the driver passes as many lanes of noise as the shape says"
                )
            };
            for lane in 0..runtime::LANES {
                let state_p = slot_p.0[lane];
                let draw_w = normal_w.0[lane];
                let v32 = A::mul_add(deviation_p_w, draw_w, shift_p);
                // d(log(P)) = (kappa*(level + swing*cos(2*pi*t/year) - log(P)) -
                // 2*pi*swing*sin(2*pi*t/year)/year) dt + (sigma) dW, stepped exactly.
                let v34 = A::mul_add(state_p, transition_p_p, v32);
                slot_p.0[lane] = v34;
            }
        }

        #[inline(always)]
        fn observe<A: runtime::Arith>(
            &self,
            _values: &[f64],
            states: &[runtime::Lane],
            outputs: &mut [runtime::Lane],
            _scratch: &mut [runtime::Lane],
        ) {
            let [slot_p] = states else {
                unreachable!("the driver passes as many states as the shape says")
            };
            let [output_p, output_log_p] = outputs else {
                unreachable!("the driver passes as many outputs as the shape says")
            };
            for lane in 0..runtime::LANES {
                let state_p = slot_p.0[lane];
                let v36 = runtime::math::exp::<A>(state_p);
                output_p.0[lane] = v36;
                output_log_p.0[lane] = state_p;
            }
        }
    }
}
