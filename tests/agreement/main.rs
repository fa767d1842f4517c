//! The interpreter and the generated code agree bit for bit: for every shipped model and every fixture,
//! from the build script and from the macro, in both arithmetic classes, with several seeds and random
//! parameters; any NaN equals any NaN.

mod compare;

/// The modules the build script wrote.
mod built {
    macro_rules! every_model {
        ($($module:ident $simulator:ident $path:literal $file:literal { $($name:literal $field:ident,)* })*) => {
            $(include!(concat!(env!("OUT_DIR"), $file));)*
        };
    }
    include!(concat!(env!("OUT_DIR"), "/every_model.rs"));
}

/// The modules the macro expands to.
mod expanded {
    macro_rules! every_model {
        ($($module:ident $simulator:ident $path:literal $file:literal { $($name:literal $field:ident,)* })*) => {
            $(driftwright_macros::model!($path);)*
        };
    }
    include!(concat!(env!("OUT_DIR"), "/every_model.rs"));
}

/// One test per model.
macro_rules! every_model {
    ($($module:ident $simulator:ident $path:literal $file:literal { $($name:literal $field:ident,)* })*) => {
        $(
            #[test]
            fn $module() {
                crate::compare::model(
                    $path,
                    |values| {
                        let parameters = crate::built::$module::Parameters { $($field: values[$name]),* };
                        crate::built::$module::$simulator::new(parameters)
                    },
                    |values| {
                        let parameters = crate::expanded::$module::Parameters { $($field: values[$name]),* };
                        crate::expanded::$module::$simulator::new(parameters)
                    },
                );
            }
        )*
    };
}

mod models {
    include!(concat!(env!("OUT_DIR"), "/every_model.rs"));
}
