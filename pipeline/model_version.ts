/**
 * Version of what the models compute. Raise it with every change that moves a number: runs made with another version are
 * then computed anew, and old ones stay told apart.
 */
export const MODEL_VERSION = "5";
