//! The one table of diagnostic codes: stable id, title, explanation.
//!
//! A code keeps its meaning for ever; new ones are added at the end of their group. Each has a fixture
//! under `tests/fixtures/diagnostics`.

macro_rules! codes {
    ($($variant:ident $id:literal $title:literal $text:literal)*) => {
        /// What kind of finding a diagnostic is.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub enum Code {
            $(#[doc = concat!($id, ": ", $title, ".")] $variant,)*
        }

        impl Code {
            /// Every code, in order.
            pub const ALL: &[Self] = &[$(Self::$variant,)*];

            /// The stable id, such as `DW0103`.
            pub fn id(self) -> &'static str {
                match self { $(Self::$variant => $id,)* }
            }

            /// A short title.
            pub fn title(self) -> &'static str {
                match self { $(Self::$variant => $title,)* }
            }

            /// What it means and how to mend it, as text of several lines.
            pub fn explanation(self) -> &'static str {
                match self { $(Self::$variant => $text,)* }
            }
        }
    };
}

impl Code {
    /// The code of this id, in any case of letters.
    pub fn from_id(id: &str) -> Option<Self> {
        let mut all = Self::ALL.iter().copied();
        all.find(|code| code.id().eq_ignore_ascii_case(id))
    }
}

/// The page `check --explain CODE` prints; none for a code that does not exist.
///
/// ```
/// let page = driftwright::diagnostic::explain("dw0103").unwrap();
/// assert!(page.starts_with("DW0103: unknown name"));
/// ```
pub fn explain(id: &str) -> Option<String> {
    let code = Code::from_id(id)?;
    Some(format!(
        "{}: {}\n\n{}\n",
        code.id(),
        code.title(),
        code.explanation()
    ))
}

codes! {
UnreadableFile "DW0001" "file cannot be read"
"The file does not exist, is a directory, may not be read, or is not UTF-8 text.
Check the path; a file in another encoding must be saved as UTF-8."

TomlSyntax "DW0002" "not valid TOML"
"The file breaks the rules of TOML before its meaning comes into play: an unclosed string, a key
given twice, a value that is missing. Formulas and names with Greek letters as keys need quotes."

UnknownKey "DW0101" "unknown key or table"
"The language has no such key at this place. Nothing in a model file is ever ignored, because a
misspelt key would silently change the model. The hint names the nearest key that exists here."

MissingKey "DW0102" "missing key"
"A key that this table needs is not there: `[model]` needs `name`, each state needs `initial` and
`drift`, each derived quantity and readout needs `formula`, and there must be a state."

UnknownName "DW0103" "unknown name"
"A formula uses a name that is neither a parameter, a state, a sub-expression of `[where]` nor a
derived quantity, nor `t` or `pi`. Declare it, or mend the spelling."

WrongType "DW0104" "wrong type of value"
"The key exists, but its value has another type. Formulas are strings, such as drift = \"mu*S\";
default values of parameters are numbers."

BadName "DW0105" "not a name"
"Names are letters (Greek and other Unicode letters too), digits and `_`, and start with a letter.
The model's own name is snake_case in ASCII, because it names the generated module."

ReservedName "DW0106" "reserved name"
"`t` (time), `pi`, `inf` and the names of functions have a fixed meaning in formulas, and `self`,
`super` and `crate` cannot be spelt in generated code. Choose another name."

NameTwice "DW0107" "a name with two meanings"
"Drivers, parameters, states, sub-expressions, derived quantities and readouts share one name space:
a name has one meaning in the whole file. Rename one of the two."

UnknownChoice "DW0108" "unknown choice"
"The key takes one of a few words: `calculus` is \"ito\" or \"stratonovich\", `at_edge` is \"absorb\",
\"reflect\" or \"as_equation\", `scheme` names a scheme, `law_of` claims name a law."

LookAlike "DW0109" "names that look alike"
"Two different names of the file look the same, such as the micro sign and the Greek mu, or a Latin and
a Cyrillic a: a reader cannot tell which one a formula uses. Rename one, or use one character for both.
Names that differ only in how their accents are composed are one name."

FormulaSyntax "DW0201" "formula cannot be read"
"The formula breaks off or something stands where it cannot. Formulas are made of + - * / ^,
parentheses, numbers, names and function calls; products need a `*`."

UnknownCharacter "DW0202" "character not used in formulas"
"The character has no meaning in a formula. Powers are written `x^2`, products `a*b`, and a minus sign
is the `-` of the keyboard."

BadNumber "DW0203" "number cannot be read"
"Numbers are written 12, 0.5, 1e-3. They must fit a double precision number, between about 1e-307
and 1e308 in size, and hold at most 1000 digits."

UnbalancedParentheses "DW0204" "parentheses do not match"
"A parenthesis is opened and not closed, or closed and not opened. The place shown is the parenthesis
without a partner."

NestedTooDeep "DW0205" "formula nested too deep"
"Parentheses, calls, powers and signs may stand inside one another up to 200 levels. Name the inner
parts in `[where]`. With all definitions put in, a formula may nest up to 5000 levels."

NotAFunction "DW0206" "function that does not exist, or is not called"
"A name is followed by parentheses and is not a function, or a function stands without its argument.
Functions: exp log sqrt abs sin cos tan asin acos atan sinh cosh tanh asinh acosh atanh cbrt erf
normal_cdf normal_pdf normal_quantile min max sign. `log` is the natural logarithm."

ArgumentCount "DW0207" "wrong number of arguments"
"`min` and `max` take two arguments, every other function takes one. For the largest of three nest
the calls: `max(a, max(b, c))`."

NotAllowedHere "DW0208" "name that may not be used here"
"The name exists, but not at this place: initial values, ranges, domains and assumptions hold
parameters only; correlations parameters and t; drift and diffusion t, parameters and states; a
`through` its own state; the right side of a moment claim t and parameters."

Cycle "DW0209" "definitions that use one another"
"Sub-expressions, derived quantities or ends of ranges use one another in a circle, so that none
of them has a meaning. Break the circle."

Kink "DW0210" "function that is not twice differentiable"
"Ito's rule needs two derivatives. `abs`, `min`, `max` and `sign` have kinks: where a path
crosses one, a local-time term would be missing. Use them in readouts, drifts and diffusions."

Undefined "DW0211" "formula without a value"
"A part of the formula has no real value whatever the model's values are: a division by zero, the
logarithm or a root of a negative number, or a power too large to be written out."

ReservedSyntax "DW0212" "syntax kept for later"
"Square brackets are kept for indexed families and have no meaning yet. Parts of a formula are grouped
with round parentheses."

ValueOutsideRange "DW0301" "default value outside its range"
"The default value of a parameter must lie inside the parameter's own range."

BadInterval "DW0302" "interval cannot be read"
"Intervals are written \"(0, inf)\", \"[0, 1]\", \"(-inf, b]\": a parenthesis leaves the end out, a
bracket keeps it in, infinite ends are always left out, and the lower end lies below the upper."

BadAssumption "DW0303" "assumption cannot be used"
"An assumption is one inequality between two formulas in the parameters, with <, <=, > or >=, such
as \"2*kappa*theta >= sigma^2\"."

AssumptionFails "DW0304" "assumption fails at the default values"
"The default values of the parameters do not satisfy the assumption, so that a simulator with them
will refuse to start. Change the defaults or the assumption."

CorrelationPair "DW0305" "correlation of a pair that cannot be"
"Each pair of different drivers is given once, as W.B = \"rho\"; a driver with itself is always 1 and
the other order of the same pair is the same pair."

CorrelationBounds "DW0306" "correlation that no Brownian motions have"
"A correlation lies between -1 and 1, and the matrix of all of them must be positive semidefinite."

UnusedParameter "DW0307" "parameter without use"
"No formula of the model uses the parameter. Remove it, or look for the term that is missing."

UnusedDriver "DW0308" "driver without use"
"No diffusion uses the Brownian motion. Remove it, or look for the term that is missing."

AssumptionImplied "DW0309" "assumption that adds nothing"
"The inequality follows from the ranges of the parameters, or from other assumptions: it rules nothing
out. Remove it, or look for a slip in it or in the ranges. What is shown is proved: the inequality is a
sum of positive multiples of the others, or of one sign on the ranges."

AssumptionContradicted "DW0310" "assumption that can never hold"
"The inequality contradicts the ranges of the parameters, or other assumptions: no values of the
parameters satisfy them all, and whatever is proved under them would be empty. Look for a sign or a
relation the wrong way round."

BadEdge "DW0401" "behaviour at an end that is not closed"
"`at_edge` says what a state does at a closed end of its domain. An open end is never reached, so
there is nothing to say. Two closed ends may differ: { lower = \"...\", upper = \"...\" }."

BadDiffusion "DW0402" "diffusion without a clear driver"
"A plain formula belongs to the only driver of the model. With several drivers write a table,
{ W = \"...\", B = \"...\" }; without drivers there is no noise to multiply."

BadCoordinate "DW0403" "coordinate that cannot be mapped back"
"`through` is a strictly monotone function of its own state on the state's domain; it must use the
state, and have a value on the whole domain."

InitialOutsideDomain "DW0404" "initial value outside the domain"
"The value at time 0 must lie in the state's domain: inside, or on an end that is closed. Where
parameters decide, the default values are tried and the finding is a warning."

OpenEndReached "DW0405" "open end that may be reached"
"An open end of a domain asserts that the state never gets there. This end is reached, or it could
not be decided: the derivation holds until then, and paths that get there are counted. Close the end
and say what happens there with `at_edge`, or add the assumption that keeps the state away."

InitialOnEdge "DW0406" "start on an end that is never left"
"The state starts on a closed end of its domain and stays there for ever, because the end absorbs or
because drift and diffusion both vanish there. Start it inside the domain, or mend the drift. A start
on an end that the state leaves, by reflection or by its drift, is fine."

ClosedEndCrossed "DW0407" "equation that leads across a closed end"
"The domain includes its end, but the diffusion does not vanish there, or the drift points outward, and
no `at_edge` stops the paths: they leave the domain and are counted as failures. Say \"absorb\" or
\"reflect\", widen the domain, or mend the formula so that it keeps the state inside."

MalformedClaim "DW0501" "claim cannot be read"
"A claim has one of drift_of, diffusion_of, martingale, mean_of, variance_of, covariance_of or law_of,
and, except martingale, the claimed value under `is`."

ClaimRefuted "DW0502" "claim is wrong"
"The claim contradicts what the compiler derived. Both sides, their difference and values of the
parameters and states at which they differ are shown."

EmptyClaim "DW0503" "claim that says nothing about the model"
"What the claim is about holds no state, only t and parameters: the claim would be true whatever drifts
and diffusions are. Name a state, or a quantity that depends on one."

SchemeRefused "DW0601" "scheme cannot be used"
"The scheme asked for does not fit the state: `exact` needs a known law, `milstein` needs
derivatives and, where the noise does not commute, increments of all its drivers. Leave the key out to have one chosen."

ProgramTooLarge "DW0602" "step program too large"
"A step of this model takes more operations than could be compiled or run. States that read one another
form a matrix, and drivers that move one state meet in pairs, so that the number grows with the square of
theirs. Split the model into several, or let fewer states and drivers depend on one another."

UnitMismatch "DW0701" "units that do not fit"
"Terms of a sum, both sides of a claim or an assumption, an initial value and its state have one unit.
A drift has the state's unit per unit of time, a diffusion the state's unit per square root of it, a
correlation none. Units not declared are found from the formulas. A number added takes the unit that
fits, so does a number in a product unless it is whole and at most 10. Both units are shown, and where
they come from: look for a missing factor, or mend the units declared."

UnitOfArgument "DW0702" "argument that is not a pure number"
"`exp`, `sin`, `normal_cdf` and their like, and exponents, take pure numbers: divide by a quantity of the
same unit. `log` takes a quantity too and is the logarithm of its number in the unit declared, as in the
log of a price; `exp` leads back, so its value may stand for a quantity. `t` alone, as in
`sin(2*pi*t)`, is the number of time units."

UnreadableUnit "DW0703" "unit that cannot be read"
"Units are products, quotients and powers of names: EUR/t, 1/year^(1/2), kg*m^2/s^2. Fractions as exponents
stand in parentheses. Names may hold any characters but * / ^ ( ) and spaces; side by side they are
a product that binds tighter than `/`. `1` and `rad` are pure numbers. The unit shown is not checked."

    NotSignedOff "DW0801" "not signed off"
"`check --require-signoff` wants a sign-off beside each model: the file `x.signoff.toml` for `x.toml`, in
which a reviewer vouches for what the model means. There is none. Read the derivation (`driftwright
derive`), then record the review with `driftwright signoff FILE --by NAME`."

    SignoffVoid "DW0802" "sign-off void"
"The model means something else than when it was signed off: a formula, range, assumption, correlation,
domain, edge, scheme or claim changed, as listed. Layout, titles, default values and another spelling of
the same formula do not count. Review the change (`driftwright compare --since REV FILE`) and sign off
anew, or undo it."

    SignoffUnreadable "DW0803" "sign-off does not count"
"The file beside the model is no sign-off, was changed after it was written (its hash does not match what
it holds), or was written in a form that this version does not know. Restore it from version control, or
review the model and sign off anew."
}
