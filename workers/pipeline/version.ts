/** Version of the engine, written into every result. A test holds it equal to the package's. */
export const ENGINE_VERSION = '0.1.0';
